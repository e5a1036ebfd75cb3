// Package growth grows a network one member at a time, by keyed draws.
//
// A newcomer v brings m links. Each goes, with probability r (the open share), to a member drawn uniformly from those
// present; otherwise to member j with probability proportional to
//
//	eta_j T_j^alpha age_j^-nu idle_j^-mu
//
// all as they stood before v came, where
//
//	eta_j = exp(-beta eps_j)      fitness
//	T_j   = m + a + d_j           tickets: links it brings, head start, links received
//	alpha                         kernel, 1 in the plain rule
//	age_j = v - j                 arrivals since it came; nu is the fading
//	idle_j = v - last_j           arrivals since it last came, or received a link; mu is the idling
//
// Member 0 is alone at first; member 1 puts its m links on it. MODEL.md states every lever:
//
//	distinct  a newcomer's links go to different members, drawn one after another without replacement; while fewer than m
//	          members are there, it makes one to each
//	ceiling c a member with d_j >= c L, L all links before the newcomer came, takes none; if every member a link could go
//	          to stands at the ceiling, the ceiling does not hold for that link
//	levy      of the links received, those above the share "above" of all count only 1 - rate as tickets
//	expiry x  links made more than x arrivals ago count neither in d_j nor in L, but for the ceiling
package growth

import (
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"math"

	"preponder/sim/internal/exact"
	"preponder/sim/law"
)

// MaxMembers and MaxLinks bound a network.
const MaxMembers, MaxLinks = 10_000_000, 64

// Params say which network to grow. The zero levers are the plain rule.
type Params struct {
	Law        law.Law
	Sharpness  float64 // beta >= 0
	Links      float64 // m, links of a newcomer; a fraction means one more link in that share of newcomers
	HeadStart  float64 // a >= 0
	OpenShare  float64 // r in [0, 1]
	Ceiling    float64 // share of all links, 0 = none
	Kernel     float64 // alpha in [0, 3]; 0 stands for 1, UniformKernel for 0
	Fading     float64 // nu in [0, 3]
	Idling     float64 // mu in [0, 3]
	LevyAbove  float64 // share of all links above which links count less
	LevyRate   float64 // by how much, 0 = no levy
	Expiry     int     // arrivals after which a link counts no more, 0 = never
	Distinct   bool
	Members    int // size to grow to
	LeversFrom int // size at which the levers come into force; 0 = from the start
	Seed       uint32
	Start      *Start // nil: member 0 alone
}

// UniformKernel is the kernel 0: tickets count for nothing. (The zero value of Params is the plain rule.)
const UniformKernel = -1

// Timed reports whether growth needs to know when links were made and members were last active.
func (p Params) Timed() bool { return p.Fading > 0 || p.Idling > 0 || p.Expiry > 0 }

// alpha returns the exponent of the tickets.
func (p Params) alpha() float64 {
	switch p.Kernel {
	case 0:
		return 1
	case UniformKernel:
		return 0
	}
	return p.Kernel
}

// A Start is a network that already stands: energies, ranks (may be nil) and links received of its members.
type Start struct {
	Energy   []float64
	Rank     []float32
	Received []int32
	History  *Network // the network it is, if it was grown here: when each link was made; nil where that is not known
}

// A Network is what growth leaves: a network of N members holds every smaller one.
type Network struct {
	Params
	Energy  []float64 // of each member
	Targets []int32   // of each link, in order
	first   []int32   // links before member v, where they are no plain multiple; nil otherwise
	from    int       // members of the start
}

// LinksBefore returns how many links were made before member v came; with v = Members all of them.
func (n *Network) LinksBefore(v int) int {
	if n.first != nil {
		return int(n.first[max(v-n.from, 0)])
	}
	m := int(n.Links)
	if v <= 1 {
		return 0
	}
	if !n.Distinct || v <= m {
		if !n.Distinct {
			return m * (v - 1)
		}
		return v * (v - 1) / 2
	}
	return m*(m-1)/2 + m*(v-m)
}

// From returns the size the growth began at: 1, or the members of the start.
func (n *Network) From() int { return n.from }

// Received returns the links each of the first v members has received.
func (n *Network) Received(v int) []int32 {
	d := make([]int32, v)
	for _, j := range n.Targets[:n.LinksBefore(v)] {
		d[j]++
	}
	return d
}

// Rank returns the share of the law that is fitter than member j, which decided its energy; for a member of a start what
// that says, 0 if nothing.
func (n *Network) Rank(j int) float64 {
	if j < n.from && n.Start != nil {
		if n.Start.Rank == nil {
			return 0
		}
		return float64(n.Start.Rank[j])
	}
	return exact.Unit(exact.Bits(exact.Key(n.Seed, exact.Energies), uint64(j), 0))
}

// Digest returns the hex SHA-256 of the targets as little-endian int32.
func (n *Network) Digest() string {
	h := sha256.New()
	buf := make([]byte, 0, 1<<16)
	for _, j := range n.Targets {
		if buf = binary.LittleEndian.AppendUint32(buf, uint32(j)); len(buf) == cap(buf) {
			h.Write(buf)
			buf = buf[:0]
		}
	}
	h.Write(buf)
	return hex.EncodeToString(h.Sum(nil))
}

// BetaMu returns beta times the chemical potential this very network shows at its size,
//
//	exp(-beta mu) = Z / (t m (1 - r)),   Z = sum eta_j T_j.
func (n *Network) BetaMu(received []int32) float64 { return n.Pulls().BetaMu(received) }

// Pulls are the fitnesses of a network's members, for measuring it at many sizes.
type Pulls struct {
	n     *Network
	least float64
	eta   []float64 // relative to the fittest
}

// Pulls returns them.
func (n *Network) Pulls() Pulls {
	p := Pulls{n, math.Inf(1), make([]float64, len(n.Energy))}
	for _, e := range n.Energy {
		p.least = math.Min(p.least, e)
	}
	for j, e := range n.Energy {
		p.eta[j] = exact.Exp(-n.Sharpness * (e - p.least))
	}
	return p
}

// LogMean returns the logarithm of the mean fitness of the members.
func (p Pulls) LogMean() float64 {
	sum := 0.0
	for _, f := range p.eta {
		sum += f
	}
	return math.Log(sum/float64(len(p.eta))) - p.n.Sharpness*p.least
}

// Along returns BetaMu at these sizes, ascending, none below From.
func (p Pulls) Along(sizes []int32) []float64 {
	n, z, v := p.n, 0.0, 0
	own := n.Links + n.HeadStart
	out := make([]float64, 0, len(sizes))
	for _, size := range sizes {
		from := n.LinksBefore(v)
		if v == 0 {
			from = 0
		}
		for ; v < int(size); v++ {
			z += p.eta[v] * own
		}
		for _, j := range n.Targets[from:n.LinksBefore(v)] {
			z += p.eta[j]
		}
		out = append(out, p.of(z, v))
	}
	return out
}

// of returns beta mu where the pulls of v members sum to z.
func (p Pulls) of(z float64, v int) float64 {
	n := p.n
	return n.Sharpness*p.least - math.Log(z/(float64(v)*n.Links*(1-n.OpenShare)))
}

// BetaMu is the network's BetaMu when its first members had received so many links.
func (p Pulls) BetaMu(received []int32) float64 {
	n, z := p.n, 0.0
	for j, d := range received {
		z += p.eta[j] * (n.Links + n.HeadStart + float64(d))
	}
	return p.of(z, len(received))
}
