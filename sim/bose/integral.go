// Package bose solves the Bose gas of a growing network: energies from a law, one boson per link.
package bose

import (
	"math"

	"preponder/sim/law"
)

// gauss16 are the positive nodes and weights of the 16-point Gauss-Legendre rule (Abramowitz & Stegun table 25.4).
var gauss16 = [8][2]float64{
	{0.095012509837637440185, 0.189450610455068496285}, {0.281603550779258913230, 0.182603415044923588867},
	{0.458016777657227386342, 0.169156519395002538189}, {0.617876244402643748447, 0.149595988816576732081},
	{0.755404408355003033895, 0.124628971255533872052}, {0.865631202387831743880, 0.095158511682492784810},
	{0.944575023073232576078, 0.062253523938647892863}, {0.989400934991649932596, 0.027152459411754094852}}

// A Spectrum is a law cut into nodes in ln eps, so that one sum gives any of its integrals for every sharpness and
// chemical potential. Panels are so short in ln eps that the nearest pole of 1/(exp(beta(eps-mu))-1), at distance pi in
// ln eps, costs less than 1e-15; what lies below the lowest node is added in closed form from the edge of the law.
type Spectrum struct {
	law       law.Law
	edge      law.Edge
	lowest    float64 // nodes begin at ln eps = lowest
	top       float64 // and end at ln eps = top
	width     float64 // of a panel
	eps, mass []float64
}

// NewSpectrum prepares a law with a ground level.
func NewSpectrum(l law.Law) *Spectrum {
	s := &Spectrum{law: l, edge: l.Edge()}
	if levels, ok := l.(law.Leveled); ok {
		s.eps, s.mass = levels.Levels()
		return s
	}
	_, high := l.Support()
	if math.IsInf(high, 1) {
		high = l.Quantile(0.9)
		for l.Density(high)*high > 1e-24 {
			high *= 1.2
		}
	}
	s.top = math.Log(high)
	s.width = math.Min(1, 6/(1+math.Max(s.edge.Theta, 0)))
	s.lowest = s.top
	s.reach(s.top - 40)
	return s
}

func (s *Spectrum) leveled() bool { return s.edge.Atom > 0 || s.width == 0 }

// reach extends the nodes down to ln eps <= to.
func (s *Spectrum) reach(to float64) {
	if s.leveled() {
		return
	}
	for s.lowest > to {
		center, half := s.lowest-s.width/2, s.width/2
		for _, g := range gauss16 {
			for _, x := range [2]float64{center + half*g[0], center - half*g[0]} {
				e := math.Exp(x)
				if d := s.law.Density(e); d > 0 {
					s.eps = append(s.eps, e)
					s.mass = append(s.mass, half*g[1]*d*e)
				}
			}
		}
		s.lowest -= s.width
	}
}

// groundReach is how far below the smallest scale of the integrand the nodes go: the closed form used beneath is right
// to that relative size.
const groundReach = 38 // e^-38 = 3e-17

// GroundIntegral returns I(beta, mu) for mu <= 0:
//
//	I = ∫ p(eps) / (exp(beta (eps - mu)) - 1) d eps
//
// relative error <= 1e-12 where the law is smooth; +Inf at mu = 0 when the edge exponent is <= 0 or the ground level
// holds an atom. Power law: ((theta+1)/theta) D_theta(beta)/beta, D as in Abramowitz & Stegun 27.1.1.
func (s *Spectrum) GroundIntegral(beta, mu float64) float64 {
	if beta == 0 {
		if mu == 0 {
			return math.Inf(1)
		}
		panic("bose: at sharpness 0 only beta*mu has a meaning")
	}
	if s.leveled() {
		sum := 0.0
		for i, e := range s.eps {
			sum += s.mass[i] / math.Expm1(beta*(e-mu))
		}
		return sum
	}
	theta := s.edge.Theta
	if mu == 0 && theta <= 0 {
		return math.Inf(1)
	}
	scale := math.Min(-math.Log(beta), s.top)
	if mu < 0 {
		scale = math.Min(scale, math.Log(-mu))
	}
	s.reach(scale - groundReach)
	sum := 0.0
	for i, e := range s.eps {
		sum += s.mass[i] / math.Expm1(beta*(e-mu))
	}
	if mu == 0 {
		return sum + s.edge.Scale*math.Exp(theta*s.lowest)/(beta*theta)
	}
	return sum + s.edge.Scale*math.Exp((theta+1)*s.lowest)/(theta+1)/math.Expm1(-beta*mu)
}

// integralAndSlope returns I and its derivative with respect to ln(-mu), mu < 0; the slope is always negative.
func (s *Spectrum) integralAndSlope(beta, mu float64) (i, slope float64) {
	if !s.leveled() {
		s.reach(math.Min(math.Min(-math.Log(beta), s.top), math.Log(-mu)) - groundReach)
	}
	add := func(mass, x float64) {
		if x > 700 {
			return
		}
		u := math.Expm1(x)
		n := mass / u
		i += n
		slope += n * (u + 1) / u
	}
	for k, e := range s.eps {
		add(s.mass[k], beta*(e-mu))
	}
	if !s.leveled() {
		add(s.edge.Scale*math.Exp((s.edge.Theta+1)*s.lowest)/(s.edge.Theta+1), -beta*mu)
	}
	return i, beta * mu * slope
}

// Mean returns E[g(eps)] over the law.
func (s *Spectrum) Mean(g func(eps float64) float64) float64 {
	sum := 0.0
	for i, e := range s.eps {
		sum += s.mass[i] * g(e)
	}
	if !s.leveled() {
		sum += s.edge.Scale * math.Exp((s.edge.Theta+1)*s.lowest) / (s.edge.Theta + 1) * g(0)
	}
	return sum
}
