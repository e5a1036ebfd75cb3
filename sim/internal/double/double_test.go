package double

import (
	"fmt"
	"math/big"
	"math/rand/v2"
	"os/exec"
	"strings"
	"testing"

	"preponder/sim/internal/near"
)

// The source is mpmath (Debian's python3-mpmath) at 50 digits, evaluated when the test runs.
func TestFunctions(t *testing.T) {
	python := near.Python(t, "mpmath")
	r := rand.New(rand.NewPCG(7, 7))
	script := "from mpmath import *\nmp.dps=50\ndef see(name, miss, tol):\n  if not abs(miss) <= tol: print(name, nstr(miss, 5))\n"
	say := func(n Number) string {
		return fmt.Sprintf("(mpf(%v)+mpf(%v))", fmt.Sprintf("%g", n.hi), fmt.Sprintf("%g", n.lo))
	}
	for range 300 {
		a := Of((r.Float64() - 0.5) * []float64{0.01, 2, 60, 600}[r.IntN(4)]).Over(Of(3))
		b := Of(r.Float64() + 0.1).Over(Of(7)).By([]float64{1e-9, 1, 1e9}[r.IntN(3)])
		sin, cos := a.SinCos()
		for _, c := range []struct {
			want string
			got  Number
			tol  string
		}{
			{"A+B", a.Plus(b), "2e-31*(abs(A)+abs(B))"}, {"A*B", a.Times(b), "2e-31*abs(A*B)"}, {"A/B", a.Over(b), "2e-31*abs(A/B)"}, {"sqrt(B)", b.Sqrt(), "2e-31*sqrt(B)"},
			{"exp(A)", a.Exp(), "(1+abs(A))*1e-30*exp(A)"}, {"expm1(A)", a.Expm1(), "(1+abs(A))*1e-30*abs(expm1(A))"}, {"log(B)", b.Log(), "1e-31*(1+abs(log(B)))"},
			{"B**(A/100)", b.Power(a.Over(Of(100))), "1e-29*B**(A/100)"}, {"B**3", b.Power(Of(3)), "1e-30*B**3"}, {"sin(A)", sin, "1e-31*(1+abs(A))"}, {"cos(A)", cos, "1e-31*(1+abs(A))"},
		} {
			script += fmt.Sprintf("A=%s;B=%s;see('%s', (%s)-%s, %s)\n", say(a), say(b), c.want, c.want, say(c.got), c.tol)
		}
	}
	cmd := exec.Command(python, "-")
	cmd.Stdin = strings.NewReader(script)
	if out, err := cmd.CombinedOutput(); err != nil || len(out) > 0 {
		t.Errorf("%v\n%s", err, out)
	}
}

// The 16-point rule integrates every power up to 31 exactly.
func TestRule(t *testing.T) {
	nodes, weights := Sixteen()
	for k := 0; k <= 31; k++ {
		sum := Number{}
		for i, x := range nodes {
			sum = sum.Plus(weights[i].Times(x.Power(Of(float64(k)))))
		}
		want := 0.0
		if k%2 == 0 {
			want = 2
		}
		miss := sum.Minus(Of(want).Over(Of(float64(k + 1))))
		if v, _ := new(big.Float).Add(big.NewFloat(miss.hi), big.NewFloat(miss.lo)).Float64(); v > 3e-31 || v < -3e-31 {
			t.Errorf("x^%d: off by %g", k, v)
		}
	}
}
