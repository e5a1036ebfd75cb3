package exact

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mathext"
	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"

	"preponder/sim/internal/near"
)

func TestExpLogAgainstStandardLibrary(t *testing.T) {
	for i := range uint64(200000) {
		x := (Unit(Bits(1, i, 0)) - 0.5) * 1400
		near.Rel(t, "exp", Exp(x), math.Exp(x), 5e-16)
		y := math.Exp((Unit(Bits(2, i, 0)) - 0.5) * 1400)
		near.Abs(t, "log", Log(y), math.Log(y), 3e-16*math.Max(1, math.Abs(math.Log(y))))
	}
	if Exp(-800) != 0 || !math.IsInf(Exp(800), 1) || !math.IsInf(Log(0), -1) || Pow(0, 2) != 0 || Pow(3, 0) != 1 {
		t.Error("ends of the range")
	}
}

func TestWeights(t *testing.T) {
	eps, w := make([]float64, 100000), make([]uint16, 100000)
	for i := range eps {
		eps[i] = 40 * Unit(Bits(9, uint64(i), 0))
	}
	Weights(w, eps, 4, 20)
	for i, e := range eps {
		want := math.Exp(math.Max(-86, -4*(e-20)))
		at, next := math.Float32frombits(uint32(w[i])<<16), math.Float32frombits(uint32(w[i])<<16+1<<16)
		if float64(at) > want*(1-3e-7) || float64(next) < want*(1-1e-6) {
			t.Fatalf("exp(%g) = %g is said to lie between %g and %g", -4*(e-20), want, at, next)
		}
	}
}

func TestSpecialAgainstGonum(t *testing.T) {
	for i := range uint64(3000) {
		a, b := math.Exp(6*Unit(Bits(3, i, 0))-3), math.Exp(6*Unit(Bits(4, i, 0))-3)
		x := Unit(Bits(5, i, 0))
		want, _ := math.Lgamma(a)
		near.Abs(t, "lgamma", LogGamma(a), want, 2e-13*(1+math.Abs(want)))
		near.Rel(t, "beta", Beta(a, b, x, 1-x), mathext.RegIncBeta(a, b, x), 1e-10)
		near.Abs(t, "gamma", Gamma(a, 3*b), mathext.GammaIncReg(a, 3*b), 1e-12)
		near.Abs(t, "normal", Normal(x), distuv.UnitNormal.Quantile(x), 1e-12*(1+1/x))
	}
}

func TestDrawsAreUniform(t *testing.T) {
	const draws, cells = 400000, 64
	var obs, exp [cells]float64
	for i := range uint64(draws) {
		obs[int(cells*Unit(Bits(Key(7, Links), i, 0)))]++
	}
	for i := range exp {
		exp[i] = draws / cells
	}
	if x := stat.ChiSquare(obs[:], exp[:]); x > 120 { // 63 degrees of freedom: p = 2e-5
		t.Errorf("chi-square %g over 63", x)
	}
}
