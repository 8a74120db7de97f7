package dif

// This file is the positional population count: how often each of the 64 bits
// of a word is set, over many words. Sixty-four words at a time are added with
// carry-save adders, so a word costs about five logic operations, however many
// of its bits are set.
//
// Sources, from memory: the carry-save tree of Harley and Seal in Warren,
// Hacker's Delight; its use per position by Klarqvist, Mula and Lemire.

const (
	// laneRows is how many words are folded at a time, and how many results
	// of that are folded again.
	laneRows = 64

	// foldStep divides the number of words in a fold.
	foldStep = 16

	// counterBits is the width of a bit-sliced counter: that of the uint32
	// tables, so a counter overflows only where its table would.
	counterBits = 32
)

// countLane counts the bits of one word position of the rows of one score
// level. Bit i of planes[k] is bit k of the count of bit position i.
type countLane struct {
	planes  [counterBits]uint64 // bit-sliced counters
	carries [laneRows]uint64    // results of weight 64 not yet folded
}

// inOrder are the positions of words that follow each other.
var inOrder = func() (at [laneRows]uint32) {
	for i := range at {
		at[i] = uint32(i)
	}
	return at
}()

// foldWords adds the words at some places of data to six bit planes of weight
// 1, 2, ..., 32; what no longer fits is the returned word of weight 64. There
// are at most laneRows places, a multiple of foldStep.
func foldWords(planes *[6]uint64, data []uint64, places []uint32) uint64 {
	var sixteens [laneRows / foldStep]uint64
	ones, twos, fours, eights := planes[0], planes[1], planes[2], planes[3]
	for i := range sixteens {
		if len(places) < foldStep {
			break
		}
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
		sixteens[i], eights = carrySave(eightsA, eightsB, eights)
		places = places[foldStep:]
	}
	planes[0], planes[1], planes[2], planes[3] = ones, twos, fours, eights
	a, sum := carrySave(sixteens[0], sixteens[1], planes[4])
	b, sum := carrySave(sixteens[2], sixteens[3], sum)
	carry, high := carrySave(a, b, planes[5])
	planes[4], planes[5] = sum, high
	return carry
}

// fold adds the words at the places of data. The block number says how many
// folds came before this one.
func (l *countLane) fold(data []uint64, places []uint32, block uint32) {
	l.carries[block%laneRows] = foldWords((*[6]uint64)(l.planes[:]), data, places)
	if block%laneRows == laneRows-1 {
		l.foldCarries(laneRows)
	}
}

// foldCarries adds the first carries of weight 64 to the counters. Collecting
// them first matters: how far a single carry ripples is a branch that no
// processor can foresee.
func (l *countLane) foldCarries(carries int) {
	whole := (carries + foldStep - 1) / foldStep * foldStep
	clear(l.carries[carries:whole])
	carry := foldWords((*[6]uint64)(l.planes[6:]), l.carries[:], inOrder[:whole])
	for k := 12; k < counterBits && carry != 0; k++ {
		l.planes[k], carry = l.planes[k]^carry, l.planes[k]&carry
	}
}

// drain sets counts to the counts of the lane after rows rows and some number
// of folds, and empties the lane.
func (l *countLane) drain(rows, blocks uint32, counts *[64]uint32) {
	if r := int(blocks % laneRows); r != 0 {
		l.foldCarries(r)
	}
	planes := l.planes
	l.planes = [counterBits]uint64{}
	width := uint(counterBits)
	for width > 8 && rows>>(width/2) == 0 {
		width /= 2
	}
	transposePlanes(planes[:width])
	for i, w := range planes[:width] {
		for at := uint(i); at < 64; at += width {
			counts[at] = uint32(w & (1<<width - 1))
			w >>= width
		}
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
