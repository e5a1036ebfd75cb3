// Package law holds the distributions of energies a network's members are drawn from.
//
// An energy eps >= 0 belongs to every member; its fitness is exp(-sharpness*eps). The ground level is eps = 0.
package law

// A Law is a distribution of energies.
type Law interface {
	// Density returns p(eps), 0 outside the support. Laws of levels return 0 everywhere and implement Leveled.
	Density(eps float64) float64
	// Cumulative returns P(energy <= eps).
	Cumulative(eps float64) float64
	// Quantile returns the energy below which a share u of the members lies, 0 < u < 1; increasing in u, the same bits on
	// every machine. Energies are drawn as Quantile of a keyed uniform.
	Quantile(u float64) float64
	// Support returns the least and the largest energy; either may be infinite.
	Support() (low, high float64)
	// Mean returns the mean energy.
	Mean() float64
	// Edge describes the density at the ground level.
	Edge() Edge
}

// An Edge is the leading term p(eps) ~ Scale * eps^Theta as eps -> 0, and the mass of an atom at the ground level. Below
// an energy of Below, where it is not 0, the leading term alone is right to rounding.
type Edge struct {
	Theta, Scale, Atom, Below float64
}

// A Leveled law is discrete: members share a few energies.
type Leveled interface {
	Levels() (energy, weight []float64)
}

// An Often is a law whose density is asked for often: Densities returns its Density with everything computed once that does not depend on the energy.
type Often interface {
	Densities() func(eps float64) float64
}

// Quantiles replaces each share by its Quantile.
func Quantiles(l Law, u []float64) {
	if many, ok := l.(interface{ quantiles(u []float64) }); ok { // without a call for each
		many.quantiles(u)
		return
	}
	for i, x := range u {
		u[i] = l.Quantile(x)
	}
}
