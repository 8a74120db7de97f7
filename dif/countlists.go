package dif

import "math/bits"

// countLists sorts the rows of a run by score level and counts the bits of
// their words. A row is sorted by noting in a list of its level where it is;
// its words stay where they are. After every batch of rows, each list is folded
// foldStep rows at a time from its end, so that what is left over needs no
// moving either. While a batch is sorted no list can overflow, and no branch
// depends on the rows.
type countLists struct {
	words, levels int
	batch         int // rows sorted between two folds

	// columns are the words to count: column k begins with the k-th word of
	// the first row. The first words columns are those of the rows, the others
	// those of what was answered.
	columns [][]uint64

	// places holds the lists: for every row that waits, where its first word
	// is. The list of level s begins at s*stride.
	places []uint32
	stride int

	next    []uint32    // where the next row of each level goes; at least listLevels
	rows    []uint32    // rows folded so far, by level
	carries []uint8     // carries that each lane of a level holds
	lanes   []countLane // one a column, those of a level together
}

const (
	// maxBatch is the largest batch: its words should stay in the second-level
	// cache until they are folded.
	maxBatch = 16384

	// maxPlaces bounds the memory of the lists. Little of it is touched.
	maxPlaces = 1 << 21

	// listLevels is the number of levels that eight bits can tell apart: such
	// a level needs no bounds check.
	listLevels = 256
)

// reset prepares empty lists for a run.
func (c *countLists) reset(run countRun, levels int) {
	c.words, c.columns = run.words, c.columns[:0]
	for k := range run.words {
		c.columns = append(c.columns, run.rows[k:])
	}
	if run.answered != nil {
		for k := range run.words {
			c.columns = append(c.columns, run.answered[k:])
		}
	}
	c.levels = levels
	c.lanes = atLeast(c.lanes, levels*len(c.columns))
	c.rows = atLeast(c.rows, levels)
	c.carries = atLeast(c.carries, levels)

	// A batch much larger than a fraction of the run would take memory for
	// nothing.
	c.batch = max(4*foldStep, min(maxBatch, maxPlaces/levels, run.size()/8))
	const line = 16 // places in a cache line; an odd number of lines spreads the lists over the cache
	c.stride = ((c.batch+2*foldStep)/line | 1) * line
	c.places = atLeast(c.places, levels*c.stride)
	c.next = atLeast(c.next, max(levels, listLevels))
	for s := range c.next {
		c.next[s] = ^uint32(0) // no such level: no such place
	}
	for s := range levels {
		c.next[s] = uint32(s * c.stride)
	}
}

// atLeast returns all of s, or a new slice if s has fewer than n elements.
func atLeast[T any](s []T, n int) []T {
	if len(s) < n {
		return make([]T, n)
	}
	return s
}

// add sorts rows by their levels. The first of them begins at word first.
func (c *countLists) add(level []int32, first int) {
	places, next := c.places, c.next
	at, words := uint32(first), uint32(c.words)
	for _, s := range level {
		p := next[s]
		places[p] = at
		next[s] = p + 1
		at += words
	}
}

// addScored1 sorts rows of one word. The first of them begins at word first,
// and the score level of a row is the number of its bits inside the mask.
func (c *countLists) addScored1(rows []uint64, first int, mask uint64) {
	places, next := c.places, (*[listLevels]uint32)(c.next)
	at := uint32(first)
	for _, w := range rows {
		s := uint8(bits.OnesCount64(w & mask))
		p := next[s]
		places[p] = at
		next[s] = p + 1
		at++
	}
}

// addScored2 sorts rows of two words. The first of them begins at word first,
// and the score level of a row is the number of its bits inside the masks. Four
// rows a step, one after the other: it is the loop most tests take.
func (c *countLists) addScored2(rows []uint64, first int, mask0, mask1 uint64) {
	places, next := c.places, (*[listLevels]uint32)(c.next)
	at := uint32(first)
	j := 0
	for ; j < len(rows)-7; j += 8 {
		s := uint8(bits.OnesCount64(rows[j]&mask0) + bits.OnesCount64(rows[j+1]&mask1))
		p := next[s]
		places[p] = at + uint32(j)
		next[s] = p + 1
		s = uint8(bits.OnesCount64(rows[j+2]&mask0) + bits.OnesCount64(rows[j+3]&mask1))
		p = next[s]
		places[p] = at + uint32(j+2)
		next[s] = p + 1
		s = uint8(bits.OnesCount64(rows[j+4]&mask0) + bits.OnesCount64(rows[j+5]&mask1))
		p = next[s]
		places[p] = at + uint32(j+4)
		next[s] = p + 1
		s = uint8(bits.OnesCount64(rows[j+6]&mask0) + bits.OnesCount64(rows[j+7]&mask1))
		p = next[s]
		places[p] = at + uint32(j+6)
		next[s] = p + 1
	}
	for ; j < len(rows)-1; j += 2 {
		s := uint8(bits.OnesCount64(rows[j]&mask0) + bits.OnesCount64(rows[j+1]&mask1))
		p := next[s]
		places[p] = at + uint32(j)
		next[s] = p + 1
	}
}

// fold counts rows that wait until every level has fewer than foldStep of them.
func (c *countLists) fold() {
	for s := range c.levels {
		first, end := uint32(s*c.stride), c.next[s]
		for end-first >= foldStep {
			n := min((end-first)/foldStep, laneCarries) * foldStep
			end -= n
			c.foldRows(s, c.places[end:end+n])
			c.rows[s] += n
		}
		c.next[s] = end
	}
}

// foldRows counts rows of a level, at most foldStep*laneCarries of them and a
// multiple of foldStep.
func (c *countLists) foldRows(level int, places []uint32) {
	lanes := c.lanes[level*len(c.columns):][:len(c.columns)]
	n := int(c.carries[level])
	for k := range lanes {
		l := &lanes[k]
		foldWords((*[4]uint64)(l.planes[:]), c.columns[k], places, (*[laneCarries]uint64)(l.carries[n:]))
	}
	n += len(places) / foldStep
	if n >= laneCarries {
		n -= laneCarries
		for k := range lanes {
			lanes[k].foldCarries(n, n+laneCarries)
		}
	}
	c.carries[level] = uint8(n)
}

// close counts the rows that still wait at a level. It returns the number of
// rows of the level since reset, and the level's lanes, one a column.
func (c *countLists) close(level int) (rows uint32, lanes []countLane) {
	first, end := uint32(level*c.stride), c.next[level]
	lanes = c.lanes[level*len(c.columns):][:len(c.columns)]
	rows = c.rows[level] + end - first
	n := int(c.carries[level])
	if end > first {
		waiting := (*[foldStep]uint32)(c.places[first:])[:end-first]
		for k := range lanes {
			l, column := &lanes[k], c.columns[k]
			var words [foldStep]uint64
			for i, at := range waiting {
				words[i] = column[at]
			}
			foldWords((*[4]uint64)(l.planes[:]), words[:], inOrder[:foldStep], (*[laneCarries]uint64)(l.carries[n:]))
		}
		n++
	}
	if n > 0 {
		for k := range lanes {
			lanes[k].foldCarries(0, n)
		}
	}
	c.rows[level], c.carries[level], c.next[level] = 0, 0, first
	return rows, lanes
}
