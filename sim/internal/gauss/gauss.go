// Package gauss holds the 16-point Gauss-Legendre rule, and the polynomials through its nodes.
package gauss

// positive nodes and weights of the rule on [-1, 1] (Abramowitz & Stegun table 25.4).
var positive = [8][2]float64{
	{0.095012509837637440185, 0.189450610455068496285}, {0.281603550779258913230, 0.182603415044923588867},
	{0.458016777657227386342, 0.169156519395002538189}, {0.617876244402643748447, 0.149595988816576732081},
	{0.755404408355003033895, 0.124628971255533872052}, {0.865631202387831743880, 0.095158511682492784810},
	{0.944575023073232576078, 0.062253523938647892863}, {0.989400934991649932596, 0.027152459411754094852}}

// Points of the rule.
const Points = 16

// Nodes and Weights on [-1, 1], ascending.
var Nodes, Weights = rule()

func rule() (x, w [Points]float64) {
	for i, g := range positive {
		x[7-i], w[7-i] = -g[0], g[1]
		x[8+i], w[8+i] = g[0], g[1]
	}
	return x, w
}

// Legendre returns P_0(t) to P_16(t) by the three-term recurrence (Abramowitz & Stegun 22.7.10), every step rounded.
func Legendre(t float64) (p [Points + 1]float64) {
	p[0], p[1] = 1, t
	for k := 1; k < Points; k++ {
		n := float64(k)
		p[k+1] = (float64(float64((2*n+1)*t)*p[k]) - float64(n*p[k-1])) / (n + 1)
	}
	return p
}

// project[k][i] is (2k+1)/2 w_i P_k(x_i).
var project = func() (m [Points][Points]float64) {
	for i, x := range Nodes {
		p := Legendre(x)
		for k := range Points {
			m[k][i] = float64(float64(float64(k)+0.5)*Weights[i]) * p[k]
		}
	}
	return m
}()

// A Series is a polynomial as a sum of c_k P_k(t).
type Series [Points]float64

// Through returns the polynomial with these values at the nodes.
func Through(values [Points]float64) (c Series) {
	for k := range Points {
		for i, v := range values {
			c[k] += float64(project[k][i] * v)
		}
	}
	return c
}

// At returns the value at t, and the integral from -1 to t.
func (c Series) At(t float64) (value, integral float64) {
	p := Legendre(t)
	value, integral = c[0], float64(c[0]*(t+1))
	for k := 1; k < Points; k++ {
		value += float64(c[k] * p[k])
		integral += float64(c[k]*(p[k+1]-p[k-1])) / float64(2*k+1)
	}
	return value, integral
}
