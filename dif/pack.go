package dif

import (
	"context"
	"sync"
)

// packed holds the scored answers of all candidates as bits: one plane per binary
// item, and for an item scored 0 to m the m planes "score is at least k", k = 1 to m.
// The total score on any subset of items is then the number of bits of row AND mask.
// Items without a score on any form have no planes.
type packed struct {
	words  int
	first  []int    // per item, its first plane; first[len(items)] is the number of planes
	rows   []uint64 // candidates x words
	gaps   []bool   // per candidate: some item with planes has no scored response
	set    []int32  // per candidate, the presented set
	sets   []presented
	pooled int // candidates presented less than others of their set, where sets are not kept apart
	scores [][]*scoreTable
	data   *Data
}

// presented is one set of items that candidates were presented.
type presented struct {
	form  int // index into Data.Forms, -1 where the form does not matter
	items []bool
}

// planes returns the number of bit planes.
func (p *packed) planes() int { return p.first[len(p.first)-1] }

// itemPlanes returns the first plane of an item and the number of its planes.
func (p *packed) itemPlanes(item int) (first, n int) {
	return p.first[item], p.first[item+1] - p.first[item]
}

// mask returns the planes of the items for which in is true.
func (p *packed) mask(in func(item int) bool) []uint64 {
	m := make([]uint64, p.words)
	for i := range p.data.Items {
		if in(i) {
			for b := p.first[i]; b < p.first[i+1]; b++ {
				m[b/64] |= 1 << (b % 64)
			}
		}
	}
	return m
}

// setting says which candidates are kept apart when they are matched.
type setting int

const (
	oneSet setting = iota // everybody together
	bySet                 // by the set of items presented
	byForm                // by form
)

// pack scores and packs the answers of d. Which set each candidate was presented is
// found over all items; candidates are then kept apart as the setting says.
func pack(ctx context.Context, d *Data, by setting, workers int) (*packed, error) {
	p := &packed{data: d, scores: d.scoreTables(), first: make([]int, len(d.Items)+1)}
	for i := range d.Items {
		p.first[i+1] = p.first[i]
		if d.keyed(i) {
			p.first[i+1] += max(1, d.Items[i].MaxScore)
		}
	}
	p.words = max(1, (p.planes()+63)/64)
	n := d.Candidates()
	p.rows = make([]uint64, n*p.words)
	p.gaps = make([]bool, n)
	partial := make([]bool, n) // not presented every item
	err := eachRange(ctx, n, workers, func(from, to int) {
		for c := from; c < to; c++ {
			p.gaps[c], partial[c] = p.packRow(c)
		}
	})
	if err != nil {
		return nil, err
	}
	p.assignSets(partial, by)
	return p, nil
}

// form returns the index of the score tables of candidate c.
func (p *packed) form(c int) int {
	if p.data.FormOf == nil {
		return 0
	}
	return int(p.data.FormOf[c])
}

// packRow fills the row of one candidate. gap reports an item with planes that has no
// scored response, partial an item the candidate was not presented.
func (p *packed) packRow(c int) (gap, partial bool) {
	row := p.rows[c*p.words : (c+1)*p.words]
	tables := p.scores[p.form(c)]
	for i, code := range p.data.Answers.Row(c) {
		first := p.first[i]
		width := p.first[i+1] - first
		s := tables[i][code]
		switch {
		case s == noScore:
			gap = gap || width > 0
			partial = partial || !shown(tables[i], code, width > 0)
		case width == 1:
			row[first/64] |= uint64(s&1) << (first % 64)
		default:
			for k := 0; k < int(s) && k < width; k++ {
				row[(first+k)/64] |= 1 << ((first + k) % 64)
			}
		}
	}
	return gap, partial
}

// shown reports whether an answer code without a score still means that the item was
// presented. Where the candidate's form has no key for an item that other forms score,
// the item counts as not presented, whatever the candidate did.
func shown(t *scoreTable, code byte, scored bool) bool {
	if scored && t[CodeOmitted] == noScore {
		return false
	}
	return code != CodeNotPresented && code != CodeTechnical
}

// assignSets numbers the presented sets in order of first appearance.
func (p *packed) assignSets(partial []bool, by setting) {
	d := p.data
	p.set = make([]int32, d.Candidates())
	if by != bySet {
		p.assignForms(partial, by == byForm && d.FormOf != nil)
		return
	}
	index := map[string]int32{}
	whole := int32(-1) // the set of candidates who were presented everything
	key := make([]byte, (len(d.Items)+7)/8)
	for c := range p.set {
		if whole >= 0 && !partial[c] {
			p.set[c] = whole
			continue
		}
		clear(key)
		p.eachItem(c, func(i int, shown bool) {
			if shown {
				key[i/8] |= 1 << (i % 8)
			}
		})
		s, ok := index[string(key)]
		if !ok {
			s = int32(len(p.sets))
			index[string(key)] = s
			items := make([]bool, len(d.Items))
			for i := range items {
				items[i] = key[i/8]>>(i%8)&1 == 1
			}
			p.sets = append(p.sets, presented{form: -1, items: items})
		}
		if !partial[c] {
			whole = s
		}
		p.set[c] = s
	}
}

// eachItem tells for every item whether candidate c was presented it.
func (p *packed) eachItem(c int, tell func(item int, shown bool)) {
	tables := p.scores[p.form(c)]
	for i, code := range p.data.Answers.Row(c) {
		tell(i, tables[i][code] != noScore || shown(tables[i], code, p.first[i+1] > p.first[i]))
	}
}

// assignForms makes one set per form, or one of everybody. A set holds what any of its
// candidates was presented; pooled counts those who were presented less.
func (p *packed) assignForms(partial []bool, apart bool) {
	d := p.data
	p.sets = []presented{{form: -1, items: make([]bool, len(d.Items))}}
	if apart {
		p.sets = nil
		for f := range d.Forms {
			p.sets = append(p.sets, presented{form: f, items: make([]bool, len(d.Items))})
		}
	}
	whole := make([]bool, len(p.sets)) // somebody was presented everything
	for c := range p.set {
		if apart {
			p.set[c] = int32(d.FormOf[c])
		}
		set := &p.sets[p.set[c]]
		switch {
		case whole[p.set[c]]:
		case !partial[c]:
			whole[p.set[c]] = true
			for i := range set.items {
				set.items[i] = true
			}
		default:
			p.eachItem(c, func(i int, shown bool) { set.items[i] = set.items[i] || shown })
		}
	}
	for c := range p.set {
		if partial[c] {
			less := false
			p.eachItem(c, func(i int, shown bool) { less = less || p.sets[p.set[c]].items[i] && !shown })
			if less {
				p.pooled++
			}
		}
	}
}

// answered fills the planes of the items of candidate c that have a scored response.
func (p *packed) answered(c int, row []uint64) {
	clear(row)
	tables := p.scores[p.form(c)]
	for i, code := range p.data.Answers.Row(c) {
		if tables[i][code] != noScore {
			for b := p.first[i]; b < p.first[i+1]; b++ {
				row[b/64] |= 1 << (b % 64)
			}
		}
	}
}

const rangeRows = 1 << 15 // candidates handed to a worker at a time

// eachRange calls work for ranges that cover 0 to n, on the given number of
// goroutines, and stops between ranges when ctx is done.
func eachRange(ctx context.Context, n, workers int, work func(from, to int)) error {
	ranges := make(chan int, (n+rangeRows-1)/rangeRows)
	for from := 0; from < n; from += rangeRows {
		ranges <- from
	}
	close(ranges)
	var wg sync.WaitGroup
	for range max(1, workers) {
		wg.Go(func() {
			for from := range ranges {
				if ctx.Err() != nil {
					return
				}
				work(from, min(from+rangeRows, n))
			}
		})
	}
	wg.Wait()
	return ctx.Err()
}
