package exact

// A Stream names what a draw is for, so that no two purposes share a number.
type Stream uint64

// Streams in use. Adding one at the end keeps every old network as it was.
const (
	Energies Stream = iota + 1
	Links
	Extra
	Posterior
	Families
	Futures
)

// Key begins the draws of one purpose under one seed.
func Key(seed uint32, s Stream) uint64 {
	return mix(uint64(seed)*0x9E3779B97F4A7C15 + uint64(s)*0xD1B54A32D192ED03)
}

// Bits returns the 64 bits that belong to (key, index, try): a keyed draw, not a stream, so link k keeps its chance when
// anything before it changes. Two multiplications, xor-shifts between.
func Bits(key, index, try uint64) uint64 {
	return mix(Try(key, try) + index*0x9E3779B97F4A7C15)
}

// Try returns the key that stands for (key, try): Bits(Try(key, try), index, 0) = Bits(key, index, try).
func Try(key, try uint64) uint64 { return key + try*0xA0761D6478BD642F }

// Again returns a second, independent 64 bits from the first.
func Again(bits uint64) uint64 { return mix(bits ^ 0xC2B2AE3D27D4EB4F) }

// Unit maps 64 bits to the open interval (0, 1), spacing 2^-53.
func Unit(bits uint64) float64 { return (float64(bits>>11) + 0.5) * (1.0 / (1 << 53)) }

func mix(x uint64) uint64 {
	x ^= x >> 32
	x *= 0xD6E8FEB86659FD93
	x ^= x >> 29
	x *= 0xFF51AFD7ED558CCD
	return x ^ x>>32
}
