package dif

import "slices"

// arrangement holds the packed rows of the labelled candidates of one grouping,
// brought together by group, presented set and completeness, so that a counting
// pass reads them in runs.
type arrangement struct {
	packed *packed
	groups int // number of groups
	runs   []run
	rows   []uint64 // in the order of the runs
	gaps   []uint64 // answered planes of the rows of incomplete runs, in their order
	order  []int32  // the candidate of each row
	sets   []int    // presented sets, ascending, that hold candidates of several groups
	sizes  []int    // candidates by place: 0 alone, else 1 + index into sets
}

// run is a range of rows of one group that are matched among themselves.
type run struct {
	group    int
	place    int // 0: candidates whose presented set holds nobody of another group; else 1 + index into sets
	from, to int
	answered int // index of the first row in gaps; -1: every row answered everything
}

// alone is the place of candidates whose presented set holds one group only. They
// can match nobody, whatever the score, and are kept together.
const alone = 0

// arrange brings together the rows of the candidates with groupOf[c] >= 0, in stable order.
func (p *packed) arrange(groupOf []int16, groups int) *arrangement {
	a := &arrangement{packed: p, groups: groups}
	seen := make([]int16, len(p.sets)) // 1 + group of the set's first candidate, or -1 for several
	for c, g := range groupOf {
		switch s := p.set[c]; {
		case g < 0:
		case seen[s] == 0:
			seen[s] = g + 1
		case seen[s] != g+1:
			seen[s] = -1
		}
	}
	place := make([]int, len(p.sets))
	for s := range seen {
		if seen[s] < 0 {
			a.sets = append(a.sets, s)
			place[s] = len(a.sets)
		}
	}
	places := len(a.sets) + 1
	a.sizes = make([]int, places)
	// The kind of a row orders it by group, place and completeness. Kinds that occur get
	// a number, so that thousands of groups and sets need no table of all their pairs.
	kindOf := make([]int32, len(groupOf))
	number := map[int]int32{}
	var kinds []int
	last, lastNumber := -1, int32(0)
	for c, g := range groupOf {
		if g < 0 {
			continue
		}
		kind := 2 * (int(g)*places + place[p.set[c]])
		if p.gaps[c] {
			kind++
		}
		if kind != last {
			n, ok := number[kind]
			if !ok {
				n = int32(len(kinds))
				number[kind] = n
				kinds = append(kinds, kind)
			}
			last, lastNumber = kind, n
		}
		kindOf[c] = lastNumber
	}
	next := make([]int, len(kinds)) // candidates of the kind, then the place of its next row
	for c, g := range groupOf {
		if g >= 0 {
			next[kindOf[c]]++
		}
	}
	total, incomplete := 0, 0
	for _, k := range slices.Sorted(slices.Values(kinds)) {
		n := next[number[k]]
		r := run{group: k / 2 / places, place: k / 2 % places, from: total, to: total + n, answered: -1}
		if k%2 == 1 {
			r.answered = incomplete
			incomplete += n
		}
		a.runs = append(a.runs, r)
		a.sizes[r.place] += n
		next[number[k]] = total
		total += n
	}
	w := p.words
	a.order = make([]int32, total)
	a.rows = make([]uint64, total*w)
	for c, g := range groupOf {
		if g >= 0 {
			i := next[kindOf[c]]
			next[kindOf[c]]++
			a.order[i] = int32(c)
			copy(a.rows[i*w:(i+1)*w], p.rows[c*w:(c+1)*w])
		}
	}
	a.gaps = make([]uint64, incomplete*w)
	for _, r := range a.runs {
		if r.answered >= 0 {
			for i := r.from; i < r.to; i++ {
				at := (r.answered + i - r.from) * w
				p.answered(int(a.order[i]), a.gaps[at:at+w])
			}
		}
	}
	return a
}
