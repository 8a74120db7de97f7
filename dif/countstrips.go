package dif

import "math/bits"

// countStrip counts one to four neighbouring words of rows, by score level.
// Wider rows are counted as several strips.
type countStrip interface {
	// add counts the strip's words of one row per entry of level, the row's
	// score level. The rows are stride words apart, and rows begins with the
	// strip's first word of the first row.
	add(level []int32, rows []uint64, stride int)

	// close folds the rows that still wait at a score level and resets their
	// number. It returns that number and the level's lanes, one a word.
	close(level int) (rows uint64, lanes []countLane)

	// levels returns the number of score levels.
	levels() int
}

// maxStripWords is the width of the widest strip.
const maxStripWords = 4

// newCountStrip returns an empty strip of 1 to maxStripWords words.
func newCountStrip(words, levels int) countStrip {
	switch words {
	case 1:
		return make(countStrip1, levels)
	case 2:
		return make(countStrip2, levels)
	case 3:
		return make(countStrip3, levels)
	default:
		return make(countStrip4, levels)
	}
}

// countLevel is the state of a score level: the rows not yet folded, stored
// row by row so that putting one there touches one or two cache lines, and the
// lanes of their words.
type (
	countLevel1 struct {
		rows    uint64
		waiting [1 * laneRows]uint64
		lane    [1]countLane
	}
	countLevel2 struct {
		rows    uint64
		waiting [2 * laneRows]uint64
		lane    [2]countLane
	}
	countLevel3 struct {
		rows    uint64
		waiting [3 * laneRows]uint64
		lane    [3]countLane
	}
	countLevel4 struct {
		rows    uint64
		waiting [4 * laneRows]uint64
		lane    [4]countLane
	}

	countStrip1 []countLevel1
	countStrip2 []countLevel2
	countStrip3 []countLevel3
	countStrip4 []countLevel4
)

func (c countStrip1) levels() int { return len(c) }
func (c countStrip2) levels() int { return len(c) }
func (c countStrip3) levels() int { return len(c) }
func (c countStrip4) levels() int { return len(c) }

func (c countStrip1) close(s int) (uint64, []countLane) {
	return closeLevel(&c[s].rows, &c[s].waiting, c[s].lane[:])
}

func (c countStrip2) close(s int) (uint64, []countLane) {
	return closeLevel(&c[s].rows, &c[s].waiting, c[s].lane[:])
}

func (c countStrip3) close(s int) (uint64, []countLane) {
	return closeLevel(&c[s].rows, &c[s].waiting, c[s].lane[:])
}

func (c countStrip4) close(s int) (uint64, []countLane) {
	return closeLevel(&c[s].rows, &c[s].waiting, c[s].lane[:])
}

func closeLevel[R waitingRows](count *uint64, waiting *R, lanes []countLane) (uint64, []countLane) {
	rows := *count
	if r := rows % laneRows; r != 0 {
		for i := int(r) * len(lanes); i < len(*waiting); i++ {
			(*waiting)[i] = 0
		}
		for k := range lanes {
			foldLane(&lanes[k], waiting, k, rows/laneRows)
		}
	}
	*count = 0
	return rows, lanes
}

// The fold methods fold a level which has just received the last row there is
// room for. Inlined, they would take registers from the loops around them.

//go:noinline
func (l *countLevel1) fold() {
	foldLane(&l.lane[0], &l.waiting, 0, l.rows/laneRows-1)
}

//go:noinline
func (l *countLevel2) fold() {
	for k := range l.lane {
		foldLane(&l.lane[k], &l.waiting, k, l.rows/laneRows-1)
	}
}

//go:noinline
func (l *countLevel3) fold() {
	for k := range l.lane {
		foldLane(&l.lane[k], &l.waiting, k, l.rows/laneRows-1)
	}
}

//go:noinline
func (l *countLevel4) fold() {
	for k := range l.lane {
		foldLane(&l.lane[k], &l.waiting, k, l.rows/laneRows-1)
	}
}

// The put methods are the step all loops below share: a row goes to its level.
// They report whether the level is full now.

func (l *countLevel1) put(a uint64) (full bool) {
	n := l.rows
	l.waiting[n%laneRows] = a
	n++
	l.rows = n
	return n%laneRows == 0
}

func (l *countLevel2) put(a, b uint64) (full bool) {
	n := l.rows
	w := (*[2]uint64)(l.waiting[n%laneRows*2:])
	w[0], w[1] = a, b
	n++
	l.rows = n
	return n%laneRows == 0
}

func (l *countLevel3) put(a, b, c uint64) (full bool) {
	n := l.rows
	w := (*[3]uint64)(l.waiting[n%laneRows*3:])
	w[0], w[1], w[2] = a, b, c
	n++
	l.rows = n
	return n%laneRows == 0
}

func (l *countLevel4) put(a, b, c, d uint64) (full bool) {
	n := l.rows
	w := (*[4]uint64)(l.waiting[n%laneRows*4:])
	w[0], w[1], w[2], w[3] = a, b, c, d
	n++
	l.rows = n
	return n%laneRows == 0
}

func (c countStrip1) add(level []int32, rows []uint64, stride int) {
	j := 0
	for _, s := range level {
		l := &c[s]
		if l.put(rows[j]) {
			l.fold()
		}
		j += stride
	}
}

func (c countStrip2) add(level []int32, rows []uint64, stride int) {
	j := 0
	for _, s := range level {
		l := &c[s]
		if l.put(rows[j], rows[j+1]) {
			l.fold()
		}
		j += stride
	}
}

func (c countStrip3) add(level []int32, rows []uint64, stride int) {
	j := 0
	for _, s := range level {
		l := &c[s]
		if l.put(rows[j], rows[j+1], rows[j+2]) {
			l.fold()
		}
		j += stride
	}
}

func (c countStrip4) add(level []int32, rows []uint64, stride int) {
	j := 0
	for _, s := range level {
		l := &c[s]
		if l.put(rows[j], rows[j+1], rows[j+2], rows[j+3]) {
			l.fold()
		}
		j += stride
	}
}

// addScored is add for rows of one word whose score level is the number of
// their bits inside mask.
func (c countStrip1) addScored(rows []uint64, mask uint64) {
	for ; len(rows) >= 2; rows = rows[2:] {
		s, t := bits.OnesCount64(rows[0]&mask), bits.OnesCount64(rows[1]&mask)
		if l := &c[s]; l.put(rows[0]) {
			l.fold()
		}
		if l := &c[t]; l.put(rows[1]) {
			l.fold()
		}
	}
	if len(rows) != 0 {
		if l := &c[bits.OnesCount64(rows[0]&mask)]; l.put(rows[0]) {
			l.fold()
		}
	}
}

// addScored is add for rows of two words whose score level is the number of
// their bits inside the masks. Two rows a step: it is the loop most tests take.
func (c countStrip2) addScored(rows []uint64, mask0, mask1 uint64) {
	j := 0
	for ; j < len(rows)-3; j += 4 {
		s := bits.OnesCount64(rows[j]&mask0) + bits.OnesCount64(rows[j+1]&mask1)
		t := bits.OnesCount64(rows[j+2]&mask0) + bits.OnesCount64(rows[j+3]&mask1)
		if l := &c[s]; l.put(rows[j], rows[j+1]) {
			l.fold()
		}
		if l := &c[t]; l.put(rows[j+2], rows[j+3]) {
			l.fold()
		}
	}
	if j < len(rows)-1 {
		s := bits.OnesCount64(rows[j]&mask0) + bits.OnesCount64(rows[j+1]&mask1)
		if l := &c[s]; l.put(rows[j], rows[j+1]) {
			l.fold()
		}
	}
}
