package dif

// This file is the positional population count: how often each of the 64 bits
// of a word is set, over many words. The words wait in a buffer and are added
// sixty-four at a time with carry-save adders, so a word costs about five logic
// operations, however many of its bits are set.
//
// Sources, from memory: the carry-save tree of Harley and Seal in Warren,
// Hacker's Delight; its use per position by Klarqvist, Mula and Lemire.

const (
	// laneRows is how many rows wait at a level before they are folded.
	laneRows = 64

	// counterBits is the width of a bit-sliced counter: that of the uint32
	// tables, so a counter overflows only where its table would.
	counterBits = 32
)

// countLane counts the bits of one word position of the rows of one score
// level. Bit i of planes[k] is bit k of the count of bit position i.
type countLane struct {
	carries [8]uint64           // results of weight 64 not yet folded
	planes  [counterBits]uint64 // bit-sliced counters
}

// waitingRows are laneRows rows of one to four words, one after the other.
type waitingRows interface {
	[1 * laneRows]uint64 | [2 * laneRows]uint64 | [3 * laneRows]uint64 | [4 * laneRows]uint64
}

// foldLane adds word k of all waiting rows to the counters. The block number
// says how many folds came before this one.
func foldLane[R waitingRows](l *countLane, waiting *R, k int, block uint64) {
	stride := len(*waiting) / laneRows // words of a row, constant for each R
	if k < 0 || k >= stride {
		panic("dif: word outside the row") // spares the loop its bounds checks
	}
	var eights [laneRows / 8]uint64
	ones, twos, fours := l.planes[0], l.planes[1], l.planes[2]
	i := 0
	for j := k; j < len(*waiting)-7*stride; j += 8 * stride {
		// addEight written out: the call would cost a tenth of the loop.
		var twosA, twosB, foursA, foursB uint64
		twosA, ones = carrySave((*waiting)[j], (*waiting)[j+stride], ones)
		twosB, ones = carrySave((*waiting)[j+2*stride], (*waiting)[j+3*stride], ones)
		foursA, twos = carrySave(twosA, twosB, twos)
		twosA, ones = carrySave((*waiting)[j+4*stride], (*waiting)[j+5*stride], ones)
		twosB, ones = carrySave((*waiting)[j+6*stride], (*waiting)[j+7*stride], ones)
		foursB, twos = carrySave(twosA, twosB, twos)
		eights[i%8], fours = carrySave(foursA, foursB, fours)
		i++
	}
	l.planes[0], l.planes[1], l.planes[2] = ones, twos, fours
	l.planes[3], l.planes[4], l.planes[5], l.carries[block%8] = addEight(l.planes[3], l.planes[4], l.planes[5], &eights)
	if block%8 == 7 {
		l.foldCarries()
	}
}

// foldCarries adds the eight carries of weight 64 to the counters. Collecting
// eight of them first matters: how far a single carry ripples is a branch that
// no processor can foresee.
func (l *countLane) foldCarries() {
	var carry uint64
	l.planes[6], l.planes[7], l.planes[8], carry = addEight(l.planes[6], l.planes[7], l.planes[8], &l.carries)
	for k := 9; k < counterBits && carry != 0; k++ {
		l.planes[k], carry = l.planes[k]^carry, l.planes[k]&carry
	}
}

// drain sets counts to the counts of the lane after rows rows, all of them
// folded, and empties the lane.
func (l *countLane) drain(rows uint64, counts *[64]uint32) {
	blocks := (rows + laneRows - 1) / laneRows
	if r := blocks % 8; r != 0 {
		clear(l.carries[r:])
		l.foldCarries()
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

// addEight adds eight words to three bit planes of weight 1, 2 and 4; what no
// longer fits is the returned word of weight 8.
func addEight(ones, twos, fours uint64, w *[8]uint64) (_, _, _, eights uint64) {
	twosA, ones := carrySave(w[0], w[1], ones)
	twosB, ones := carrySave(w[2], w[3], ones)
	foursA, twos := carrySave(twosA, twosB, twos)
	twosA, ones = carrySave(w[4], w[5], ones)
	twosB, ones = carrySave(w[6], w[7], ones)
	foursB, twos := carrySave(twosA, twosB, twos)
	eights, fours = carrySave(foursA, foursB, fours)
	return ones, twos, fours, eights
}

// carrySave adds three one-bit numbers in each of 64 positions.
func carrySave(a, b, c uint64) (high, low uint64) {
	u := a ^ b
	return a&b | u&c, u ^ c
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
