package dif

import (
	"math"
	"math/bits"
)

// levelCounts are the counts that every table of the Mantel-Haenszel family is
// made of, for the candidates of one group: how many there are at each score
// level, and how many of those have each bit plane set. A binary item is one
// plane (right or wrong); an item scored 0..m is m planes, plane k of it set
// when the score is at least k.
type levelCounts struct {
	levels, planes int

	// n[s] is the number of candidates at level s.
	n []uint32

	// right[s*planes+p] is the number of candidates at level s with plane p set.
	right []uint32

	// missing[s*planes+p] is the number of candidates at level s without a
	// scored response to the item of plane p. It is nil while no incomplete
	// row was counted: then nobody lacks anything.
	missing []uint32
}

// newLevelCounts returns empty counts of the levels 0..levels-1. At most
// 4,294,967,295 candidates can be counted at a level.
func newLevelCounts(levels, planes int) *levelCounts {
	return &levelCounts{
		levels: levels,
		planes: planes,
		n:      make([]uint32, levels),
		right:  make([]uint32, levels*planes),
	}
}

// answered returns the number of candidates at a level with a scored response
// to the item of a plane.
func (t *levelCounts) answered(level, plane int) uint32 {
	if t.missing == nil {
		return t.n[level]
	}
	return t.n[level] - t.missing[level*t.planes+plane]
}

// rightOf returns the counts of a level for all planes, for reading.
func (t *levelCounts) rightOf(level int) []uint32 {
	return t.right[level*t.planes : (level+1)*t.planes]
}

// missingOf is rightOf for missing, which must not be nil.
func (t *levelCounts) missingOf(level int) []uint32 {
	return t.missing[level*t.planes : (level+1)*t.planes]
}

// add adds the counts of other candidates, of the same levels and planes.
func (t *levelCounts) add(other *levelCounts) {
	addCounts(t.n, other.n)
	addCounts(t.right, other.right)
	if other.missing != nil {
		t.needMissing()
		addCounts(t.missing, other.missing)
	}
}

func (t *levelCounts) needMissing() {
	if t.missing == nil {
		t.missing = make([]uint32, t.levels*t.planes)
	}
}

func addCounts(sum, more []uint32) {
	for i, c := range more[:len(sum)] {
		sum[i] += c
	}
}

// countRun is a run of packed rows: candidates of one group who were presented
// the same items.
type countRun struct {
	// rows holds words 64-bit words per candidate, candidate after candidate.
	// Plane p is bit p%64 of word p/64. Bits after the last plane are ignored,
	// save by mask. The bits of an item without a scored response are 0.
	rows []uint64

	// answered has the shape of rows; a bit is set where the plane's item has
	// a scored response. nil: every candidate answered every item.
	answered []uint64

	words int

	// mask, of words words, selects the planes of the matching set: a
	// candidate's level is the number of bits of the row inside it. It is not
	// read when level is given.
	mask []uint64

	// level, when not nil, is the level of each candidate.
	level []int32
}

// size returns the number of candidates.
func (r countRun) size() int { return len(r.rows) / r.words }

// part returns the candidates from, ..., to-1 of the run.
func (r countRun) part(from, to int) countRun {
	r.rows = r.rows[from*r.words : to*r.words]
	if r.answered != nil {
		r.answered = r.answered[from*r.words : to*r.words]
	}
	if r.level != nil {
		r.level = r.level[from:to]
	}
	return r
}

// score sets level to the levels of the candidates from, from+1, ...
func (r countRun) score(level []int32, from int) {
	if r.level != nil {
		copy(level, r.level[from:])
		return
	}
	scoreRows(level, r.rows[from*r.words:(from+len(level))*r.words], r.mask)
}

// countBlock is the number of rows that are scored ahead of counting them.
const countBlock = maxBatch

// countScratch is the working memory of count, kept between calls. Its zero
// value is ready; one goroutine uses it at a time.
type countScratch struct {
	level [countBlock]int32
	lists countLists
}

// A run is counted bit by bit when it has fewer than sparseRows rows per score
// level, because draining the lanes of a level costs about as much as counting
// that many rows; and with more than manyLevels levels, because going over the
// lists of all levels after every batch would cost more than the rows.
const (
	sparseRows = 8
	manyLevels = 4096
)

// count adds the candidates of a run. Their levels must lie inside the table's,
// else count panics and table and scratch are of no more use. The result does
// not depend on how candidates are ordered or divided among runs.
func (t *levelCounts) count(run countRun, scratch *countScratch) {
	if rows := run.size(); rows < sparseRows*t.levels || t.levels > manyLevels {
		t.countSparse(run, scratch)
		return
	}
	t.countLanes(run, scratch)
}

// countLanes is count for many rows, at least one. The lanes it fills are those
// of countkernel.go.
func (t *levelCounts) countLanes(run countRun, scratch *countScratch) {
	if rows := run.size(); uint64(len(run.rows)) > math.MaxUint32 && rows > 1 {
		// Places are uint32.
		t.countLanes(run.part(0, rows/2), scratch)
		t.countLanes(run.part(rows/2, rows), scratch)
		return
	}
	lists := &scratch.lists
	lists.reset(run, t.levels)
	for from, size := 0, run.size(); from < size; from += lists.batch {
		to := min(from+lists.batch, size)
		rows, first := run.rows[from*run.words:to*run.words], from*run.words
		switch {
		case run.level == nil && run.words == 1:
			lists.addScored1(rows, first, run.mask[0])
		case run.level == nil && run.words == 2:
			lists.addScored2(rows, first, run.mask[0], run.mask[1])
		default:
			level := scratch.level[:to-from]
			run.score(level, from)
			lists.add(level, first)
		}
		lists.fold()
	}
	if run.answered != nil {
		t.needMissing()
	}
	for s := range t.levels {
		if rows, lanes := lists.close(s); rows > 0 {
			t.n[s] += rows
			t.drain(s, rows, lanes, run.words)
		}
	}
}

// drain adds the counts of a level's lanes to the table: words lanes of the
// rows, then as many of what was answered, if anything is missing.
func (t *levelCounts) drain(level int, rows uint32, lanes []countLane, words int) {
	var counts [64]uint32
	for k := range lanes {
		lanes[k].drain(rows, &counts)
		plane := k % words * 64
		from, to := min(plane, t.planes), min(plane+64, t.planes)
		if k < words {
			right := t.rightOf(level)[from:to]
			for i, n := range counts[:len(right)] {
				right[i] += n
			}
			continue
		}
		missing := t.missingOf(level)[from:to]
		for i, n := range counts[:len(missing)] {
			missing[i] += rows - n
		}
	}
}

// countSparse is count for few rows: it visits every set bit.
func (t *levelCounts) countSparse(run countRun, scratch *countScratch) {
	if run.answered != nil {
		t.needMissing()
	}
	for from, size := 0, run.size(); from < size; from += countBlock {
		level := scratch.level[:min(countBlock, size-from)]
		run.score(level, from)
		for i, s := range level {
			t.n[s]++
			right := t.rightOf(int(s))
			first := (from + i) * run.words
			for k, w := range run.rows[first : first+run.words] {
				countSetBits(right, 64*k, w)
			}
			if run.answered == nil {
				continue
			}
			missing := t.missingOf(int(s))
			for k, w := range run.answered[first : first+run.words] {
				countSetBits(missing, 64*k, ^w)
			}
		}
	}
}

// countSetBits adds 1 to counts[first+i] for every set bit i of word.
func countSetBits(counts []uint32, first int, word uint64) {
	if spare := first + 64 - len(counts); spare > 0 {
		if spare >= 64 {
			return
		}
		word &= ^uint64(0) >> spare
	}
	for ; word != 0; word &= word - 1 {
		counts[first+bits.TrailingZeros64(word)]++
	}
}
