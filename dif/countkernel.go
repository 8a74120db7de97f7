package dif

// This file is the positional population count: how often each of the 64 bits
// of a word is set, over many words. Sixty-four words at a time are added with
// carry-save adders, so a word costs about five logic operations, however many
// of its bits are set.
//
// Sources, from memory: the carry-save tree of Harley and Seal in Warren,
// Hacker's Delight; its use per position by Klarqvist, Mula and Lemire.

const (
	// foldStep is how many words are folded at a time.
	foldStep = 16

	// laneCarries is how many results of folding words collect before they
	// are folded themselves.
	laneCarries = 64

	// counterBits is the width of a bit-sliced counter: that of the uint32
	// tables, so a counter overflows only where its table would.
	counterBits = 32
)

// countLane counts the bits of one word position of the rows of one score
// level. Bit i of planes[k] is bit k of the count of bit position i.
type countLane struct {
	planes [counterBits]uint64 // bit-sliced counters

	// carries are words of weight foldStep not yet folded. Collecting them
	// matters: how far a single carry ripples is a branch that no processor
	// can foresee. Room is left for those of one more call of foldWords.
	carries [2 * laneCarries]uint64
	_       [8]uint64 // an odd number of cache lines spreads the lanes over the cache
}

// inOrder are the places of words that follow each other.
var inOrder = func() (at [laneCarries]uint32) {
	for i := range at {
		at[i] = uint32(i)
	}
	return at
}()

// foldWords adds the words at some places of data to four bit planes of weight
// 1, 2, 4 and 8; what no longer fits is put into carries, one word of weight 16
// for every 16 places. The places after the last 16 are not looked at.
func foldWords(planes *[4]uint64, data []uint64, places []uint32, carries *[laneCarries]uint64) {
	ones, twos, fours, eights := planes[0], planes[1], planes[2], planes[3]
	for i := 0; len(places) >= foldStep; i++ {
		at := (*[foldStep]uint32)(places)
		var twosA, twosB, foursA, foursB, eightsA, eightsB uint64
		twosA, ones = carrySave(data[at[0]], data[at[1]], ones)
		twosB, ones = carrySave(data[at[2]], data[at[3]], ones)
		foursA, twos = carrySave(twosA, twosB, twos)
		twosA, ones = carrySave(data[at[4]], data[at[5]], ones)
		twosB, ones = carrySave(data[at[6]], data[at[7]], ones)
		foursB, twos = carrySave(twosA, twosB, twos)
		eightsA, fours = carrySave(foursA, foursB, fours)
		twosA, ones = carrySave(data[at[8]], data[at[9]], ones)
		twosB, ones = carrySave(data[at[10]], data[at[11]], ones)
		foursA, twos = carrySave(twosA, twosB, twos)
		twosA, ones = carrySave(data[at[12]], data[at[13]], ones)
		twosB, ones = carrySave(data[at[14]], data[at[15]], ones)
		foursB, twos = carrySave(twosA, twosB, twos)
		eightsB, fours = carrySave(foursA, foursB, fours)
		carries[i%laneCarries], eights = carrySave(eightsA, eightsB, eights)
		places = places[foldStep:]
	}
	planes[0], planes[1], planes[2], planes[3] = ones, twos, fours, eights
}

// foldCarries adds carries at from, ..., to-1, at most laneCarries, to the
// counters.
func (l *countLane) foldCarries(from, to int) {
	var eights [laneCarries]uint64
	whole := (to - from + foldStep - 1) / foldStep * foldStep
	if from+whole > to {
		clear(l.carries[to : from+whole])
	}
	foldWords((*[4]uint64)(l.planes[4:]), l.carries[from:], inOrder[:whole], &eights)
	a, p := carrySave(eights[0], eights[1], l.planes[8])
	b, p := carrySave(eights[2], eights[3], p)
	l.planes[8] = p
	carry, p := carrySave(a, b, l.planes[9])
	l.planes[9] = p
	for k := 10; k < counterBits && carry != 0; k++ {
		l.planes[k], carry = l.planes[k]^carry, l.planes[k]&carry
	}
}

// drain sets counts to the counts of the lane after rows rows and empties the
// lane.
func (l *countLane) drain(rows uint32, counts *[64]uint32) {
	planes := l.planes
	l.planes = [counterBits]uint64{}
	if rows < 1<<16 {
		transposePlanes(planes[:16])
		for i, w := range planes[:16] {
			counts[i], counts[i+16] = uint32(w&0xffff), uint32(w>>16&0xffff)
			counts[i+32], counts[i+48] = uint32(w>>32&0xffff), uint32(w>>48)
		}
		return
	}
	transposePlanes(planes[:])
	for i, w := range planes {
		counts[i], counts[i+32] = uint32(w), uint32(w>>32)
	}
}

// carrySave adds three one-bit numbers in each of 64 positions.
func carrySave(a, b, c uint64) (high, low uint64) {
	u := a ^ b
	return (a^c)&u ^ a, u ^ c
}

// transposePlanes turns bit planes into counters. There are as many planes as a
// counter has bits, a power of two, at most 32: they are square bit matrices
// side by side, and each is transposed in place (the recursive exchange of
// Warren, Hacker's Delight, from memory). Afterwards word i holds the counters
// of the bits i, i+width, i+2*width, ...
func transposePlanes(planes []uint64) {
	width := uint(len(planes))
	for j := width / 2; j != 0; j /= 2 {
		// The low j bits of every 2j bits: 1/(2^j+1) of all ones.
		mask := ^uint64(0) / (1<<j + 1)
		for k := uint(0); k < width; k = (k + j + 1) &^ j {
			swap := (planes[k]>>j ^ planes[k+j]) & mask
			planes[k] ^= swap << j
			planes[k+j] ^= swap
		}
	}
}
