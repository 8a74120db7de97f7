package dif

import (
	"context"
	"fmt"
	"math"
	"math/bits"
	"slices"
)

// tabulator counts the rows of one arrangement and remembers what it has counted.
type tabulator struct {
	arrangement *arrangement
	external    []float64 // matching score of each row; nil: the score is taken from the row
	workers     int
	known       map[string]*tabulation // by mask
}

// tabulation holds the count tables of one matching score: for every place of the
// arrangement and every group counted so far, candidates by score level.
type tabulation struct {
	mask    []uint64
	shifts  bool // an item outside the mask adds its own score to the level
	places  []placeTables
	counted []bool // by group
}

// placeTables holds the tables of one place.
type placeTables struct {
	levels int
	scores []float64      // score of each level, ascending; nil: the level is the score
	level  [][]int32      // by run of the place, level of each row; nil where scores is nil
	runs   []int          // indexes into arrangement.runs
	counts []*levelCounts // by group; nil: not counted, or no row
	// lone reports that level 0 collects rows whose matching score nobody of another
	// group has.
	lone bool
}

// score returns the matching score of a level.
func (p *placeTables) score(level int) float64 {
	if p.scores == nil {
		return float64(level)
	}
	return p.scores[level]
}

// tabulate returns the tables of the score on the masked planes, with at least the
// given groups counted. One pass reads every row of a group once.
func (t *tabulator) tabulate(ctx context.Context, mask []uint64, groups []int) (*tabulation, error) {
	key := fmt.Sprint(mask)
	tab, ok := t.known[key]
	if !ok {
		tab = t.levels(mask)
		if t.known == nil {
			t.known = map[string]*tabulation{}
		}
		t.known[key] = tab
	}
	a, w := t.arrangement, t.arrangement.packed.words
	var runs []countRun
	var tables []*levelCounts
	var tableOf []int // of each run
	place := map[*levelCounts]int{}
	for pi := range tab.places {
		p := &tab.places[pi]
		for i, ri := range p.runs {
			r := a.runs[ri]
			if !slices.Contains(groups, r.group) || tab.counted[r.group] {
				continue
			}
			if p.counts[r.group] == nil {
				p.counts[r.group] = newLevelCounts(p.levels, a.packed.planes())
				place[p.counts[r.group]] = len(tables)
				tables = append(tables, p.counts[r.group])
			}
			c := countRun{rows: a.rows[r.from*w : r.to*w], words: w, mask: mask}
			if r.answered >= 0 {
				c.answered = a.gaps[r.answered*w : (r.answered+r.to-r.from)*w]
			}
			if p.level != nil {
				c.level = p.level[i]
			}
			runs = append(runs, c)
			tableOf = append(tableOf, place[p.counts[r.group]])
		}
	}
	if err := countRuns(ctx, runs, tables, tableOf, t.workers); err != nil {
		return nil, err
	}
	for _, g := range groups {
		tab.counted[g] = true
	}
	return tab, nil
}

// addLevel adds the counts of one level of another table to a level of this one.
func (t *levelCounts) addLevel(level int, from *levelCounts, at int) {
	t.n[level] += from.n[at]
	addCounts(t.rightOf(level), from.rightOf(at))
	if from.missing != nil {
		t.needMissing()
		addCounts(t.missingOf(level), from.missingOf(at))
	}
}

// forget drops the tables of one matching score.
func (t *tabulator) forget(tab *tabulation) { delete(t.known, fmt.Sprint(tab.mask)) }

// levels decides the score levels of every place. A place with few candidates gets
// only the scores that occur, so that thousands of presented sets cost no more
// memory than their candidates.
func (t *tabulator) levels(mask []uint64) *tabulation {
	a := t.arrangement
	tab := &tabulation{
		mask: mask, shifts: t.external == nil, places: make([]placeTables, len(a.sets)+1), counted: make([]bool, a.groups),
	}
	for ri, r := range a.runs {
		p := &tab.places[r.place]
		p.runs = append(p.runs, ri)
	}
	most := 1
	for _, m := range mask {
		most += bits.OnesCount64(m)
	}
	for place := range tab.places {
		p := &tab.places[place]
		p.counts = make([]*levelCounts, a.groups)
		switch {
		case t.external != nil:
			t.externalLevels(p)
		case a.sizes[place] < 2*most:
			t.occurringLevels(p, mask)
		default:
			p.levels = most
		}
	}
	return tab
}

// occurringLevels gives a place the scores that occur in it.
func (t *tabulator) occurringLevels(p *placeTables, mask []uint64) {
	a, w := t.arrangement, t.arrangement.packed.words
	for _, ri := range p.runs {
		r := a.runs[ri]
		level := make([]int32, r.to-r.from)
		scoreRows(level, a.rows[r.from*w:r.to*w], mask)
		for _, s := range level {
			p.scores = append(p.scores, float64(s))
		}
		p.level = append(p.level, level)
	}
	slices.Sort(p.scores)
	p.scores = slices.Compact(p.scores)
	p.levels = len(p.scores)
	for _, level := range p.level {
		for i, s := range level {
			at, _ := slices.BinarySearch(p.scores, float64(s))
			level[i] = int32(at)
		}
	}
}

// externalLevels gives a place one level per distinct external score that several
// groups have; level 0 collects the rows of the others.
func (t *tabulator) externalLevels(p *placeTables) {
	a := t.arrangement
	first := map[float64]int{}
	for _, ri := range p.runs {
		r := a.runs[ri]
		for _, s := range t.external[r.from:r.to] {
			switch g, ok := first[s]; {
			case !ok:
				first[s] = r.group
			case g != r.group && g >= 0:
				first[s] = -1
				p.scores = append(p.scores, s)
			}
		}
	}
	slices.Sort(p.scores)
	p.scores = slices.Insert(p.scores, 0, math.Inf(-1))
	p.lone, p.levels = true, len(p.scores)
	for _, ri := range p.runs {
		r := a.runs[ri]
		level := make([]int32, r.to-r.from)
		for i, s := range t.external[r.from:r.to] {
			if at, ok := slices.BinarySearch(p.scores, s); ok {
				level[i] = int32(at)
			}
		}
		p.level = append(p.level, level)
	}
}

// pairing is a tabulation seen by one comparison. Places that hold only one of its two
// groups are brought together, so that an item costs no more than the places where
// somebody can be matched.
type pairing struct {
	*tabulation
	arrangement *arrangement
	groups      [2]int
	matched     []int           // places that hold both groups, ascending
	lone        [2]*levelCounts // everybody else, by score; nil: nobody
	external    []int           // the other places, where scores are not whole numbers
}

// pair prepares a tabulation for one comparison; both groups must have been counted.
func (tab *tabulation) pair(a *arrangement, groups [2]int) *pairing {
	p := &pairing{tabulation: tab, arrangement: a, groups: groups}
	levels := 1
	for _, m := range tab.mask {
		levels += bits.OnesCount64(m)
	}
	for place := range tab.places {
		t := &tab.places[place]
		counts := [2]*levelCounts{t.counts[groups[0]], t.counts[groups[1]]}
		switch {
		case counts[0] == nil && counts[1] == nil:
		case place != alone && counts[0] != nil && counts[1] != nil:
			p.matched = append(p.matched, place)
		case !tab.shifts:
			p.external = append(p.external, place)
		default:
			for g, c := range counts {
				if c == nil {
					continue
				}
				if p.lone[g] == nil {
					p.lone[g] = newLevelCounts(levels, a.packed.planes())
				}
				for l := range t.levels {
					p.lone[g].addLevel(int(t.score(l)), c, l)
				}
			}
		}
	}
	return p
}

// itemTabler turns a pairing into the table of one item. It keeps its memory between
// calls: a table is valid until the next.
type itemTabler struct {
	table   ItemTable
	scratch []uint32
}

// of returns the table of an item. The matching score contains the item: where the mask
// leaves it out, its own score is added, so that a candidate at level s with item score k
// belongs to level s + k.
func (b *itemTabler) of(p *pairing, item int) *ItemTable {
	first, width := p.arrangement.packed.itemPlanes(item)
	t := &b.table
	t.Categories = width + 1
	t.Strata, t.Counts = t.Strata[:0], t.Counts[:0]
	if width == 0 {
		return t
	}
	shift := p.shifts && p.mask[first/64]>>(first%64)&1 == 0
	for g, c := range p.lone {
		if c != nil {
			var only [2]*levelCounts
			only[g] = c
			b.add(&placeTables{levels: c.levels}, 0, first, width, 0, c.levels, shift, only)
		}
	}
	for _, place := range p.external {
		t := &p.places[place]
		b.addApart(t, first, width, t.levels, p.groups)
	}
	for _, place := range p.matched {
		t := &p.places[place]
		set := 0
		if len(p.arrangement.packed.sets) > 1 {
			set = place
		}
		from := 0
		if t.lone {
			b.addApart(t, first, width, 1, p.groups)
			from = 1
		}
		b.add(t, set, first, width, from, t.levels, shift, [2]*levelCounts{t.counts[p.groups[0]], t.counts[p.groups[1]]})
	}
	return t
}

// addApart appends the first levels of a place for each group on its own.
func (b *itemTabler) addApart(t *placeTables, first, width, levels int, groups [2]int) {
	b.add(t, 0, first, width, 0, levels, false, [2]*levelCounts{t.counts[groups[0]], nil})
	b.add(t, 0, first, width, 0, levels, false, [2]*levelCounts{nil, t.counts[groups[1]]})
}

// add appends the strata of the levels from..to of one place.
func (b *itemTabler) add(p *placeTables, set, first, width, from, to int, shift bool, groups [2]*levelCounts) {
	t, cats := &b.table, width+1
	if !shift {
		for l := from; l < to; l++ {
			at := len(t.Counts)
			t.Counts = append(t.Counts, make([]uint32, 2*cats)...)
			var n uint32
			for g, c := range groups {
				if c != nil {
					n += c.categories(l, first, width, t.Counts[at+g*cats:at+(g+1)*cats])
				}
			}
			if n == 0 {
				t.Counts = t.Counts[:at]
				continue
			}
			t.Strata = append(t.Strata, Stratum{set, p.score(l)})
		}
		return
	}
	// The score of a level plus the item's own score; scores are whole numbers here.
	if from >= to {
		return
	}
	low, high := int(p.score(from)), int(p.score(to-1))+width
	need := (high - low + 1) * 2 * cats
	if cap(b.scratch) < need {
		b.scratch = make([]uint32, need)
	}
	scratch := b.scratch[:need]
	clear(scratch)
	var own [MaxCode + 1]uint32
	for l := from; l < to; l++ {
		s := int(p.score(l)) - low
		for g, c := range groups {
			if c == nil || c.categories(l, first, width, own[:cats]) == 0 {
				continue
			}
			for k := range cats {
				scratch[((s+k)*2+g)*cats+k] += own[k]
			}
		}
	}
	for s := low; s <= high; s++ {
		cell := scratch[(s-low)*2*cats : (s-low+1)*2*cats]
		if slices.ContainsFunc(cell, func(n uint32) bool { return n > 0 }) {
			t.Strata = append(t.Strata, Stratum{set, float64(s)})
			t.Counts = append(t.Counts, cell...)
		}
	}
}
