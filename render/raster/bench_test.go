package raster

import (
	"fmt"
	"math"
	"testing"

	"preponder/render/scene"
)

// star is a network like a condensate: half of all links go to member 3, the rest to a few others.
func star(n int) scene.Columns {
	c := scene.Columns{From: 1, Before: []int32{0}}
	for v := range n {
		if v > 0 {
			for k := range 2 {
				j := 3
				if h := (v*7919 + k*104729) % 100; h > 50 {
					j = h * h % 97
				}
				c.Targets = append(c.Targets, int32(min(j, v-1)))
			}
		}
		c.Before = append(c.Before, int32(len(c.Targets)))
		c.Rank = append(c.Rank, float32(math.Mod(float64(v)*0.6180339887, 1)))
		c.Pull = append(c.Pull, float32(1-2*math.Mod(float64(v)*0.6180339887, 1)))
	}
	return c
}

// What a frame costs while something is dragged (1,200 strokes) and at leisure (6,000).
func BenchmarkFrame(b *testing.B) {
	for _, n := range []int{1000, 5000, 20000} {
		c := star(n)
		for _, strokes := range []int{1200, 6000} {
			v := scene.View{Width: 955, Height: 700, Scale: 1, Members: n, Strokes: strokes, Following: -1, Zoom: 1}
			p := scene.Arrange(c, v)
			b.Run(fmt.Sprintf("arrange/%d/%d", n, strokes), func(b *testing.B) {
				for b.Loop() {
					p = scene.Again(p, c, v)
				}
			})
			canvas := NewCanvas(955, 700, nil)
			b.Run(fmt.Sprintf("paint/%d/%d", n, strokes), func(b *testing.B) {
				for b.Loop() {
					Paint(canvas, p, Light)
				}
			})
		}
	}
}
