// Package raster paints a scene on the CPU: plain Go, anti-aliased, RGBA premultiplied. It serves the stage, print, the
// entry marks and pages without WebGL.
package raster

// A Colour is red, green, blue in 0..255.
type Colour [3]float64

func hex(v uint32) Colour {
	return Colour{float64(v >> 16 & 255), float64(v >> 8 & 255), float64(v & 255)}
}

// A Theme is the colours of one mode.
type Theme struct {
	Plate, Rim, Ring, Ink Colour
	Ember, OpenLink       Colour
	Ramp                  [9]Colour // strong to weak pull
	Back                  Colour
	inkGain               float64 // of strokes
	washAlpha, washTone   float64
	grain, under          float64
}

// Light and Dark are the two themes, Paper the one for print.
var (
	Light = Theme{Plate: hex(0xFCFDFB), Rim: hex(0xAEBCBD), Ring: hex(0x74898E), Ink: hex(0x13222B), Ember: hex(0xE34B00), OpenLink: hex(0x7E9095), Back: hex(0xF3F5F2),
		Ramp:    [9]Colour{hex(0x1D1661), hex(0x212D76), hex(0x24428A), hex(0x265D9A), hex(0x2F76A8), hex(0x458EB0), hex(0x64A5B8), hex(0x83B6BB), hex(0xA4C6C3)},
		inkGain: 1, washAlpha: 0.34, washTone: 0.36, grain: 0.7, under: 1}
	Dark = Theme{Plate: hex(0x0E171B), Rim: hex(0x3A4F58), Ring: hex(0x8DA1A7), Ink: hex(0xF1F6F2), Ember: hex(0xFF9536), OpenLink: hex(0x6E848C), Back: hex(0x0A1013),
		Ramp:    [9]Colour{hex(0x96E4CB), hex(0x7DD7C4), hex(0x63CABF), hex(0x4CB6B5), hex(0x38A2AA), hex(0x2F899A), hex(0x2A7188), hex(0x2C5C72), hex(0x2A475A)},
		inkGain: 1.25, washAlpha: 0.46, washTone: 0.34, grain: 0.8, under: 1.4}
	Paper = func() Theme { t := Light; t.Back, t.Plate = hex(0xFFFFFF), hex(0xFFFFFF); return t }()
)

// Named returns the theme of that name, light by default.
func Named(name string) Theme {
	switch name {
	case "dark":
		return Dark
	case "paper":
		return Paper
	}
	return Light
}

// At returns the colour of a tone in [0, 1].
func (t Theme) At(tone float64) Colour {
	x := 8 * tone // by hand: math.Max and max are slow in WebAssembly
	if !(x > 0) {
		x = 0
	} else if x > 8 {
		x = 8
	}
	i := min(int(x), 7)
	f := x - float64(i)
	a, b := t.Ramp[i], t.Ramp[i+1]
	return Colour{a[0] + f*(b[0]-a[0]), a[1] + f*(b[1]-a[1]), a[2] + f*(b[2]-a[2])}
}
