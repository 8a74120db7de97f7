package dif

import (
	"math"
	"slices"
)

// groupMoments returns the moments of the matching score of one group of the arrangement.
func (t *tabulator) groupMoments(tab *tabulation, group int) scoreMoments {
	if t.external != nil {
		var scores []float64
		for _, r := range t.arrangement.runs {
			if r.group == group {
				scores = append(scores, t.external[r.from:r.to]...)
			}
		}
		slices.Sort(scores)
		ones := make([]uint32, len(scores))
		for i := range ones {
			ones[i] = 1
		}
		return weightedMoments(scores, ones)
	}
	var scores []float64
	var counts []uint32
	for i := range tab.places {
		p := &tab.places[i]
		if c := p.counts[group]; c != nil {
			for l := range p.levels {
				scores = append(scores, p.score(l))
				counts = append(counts, c.n[l])
			}
		}
	}
	return weightedMoments(scores, counts)
}

// unmatched returns how many candidates of each group stand at levels that hold
// nobody of the other.
func (tab *tabulation) unmatched(reference, focal int) (lost [2]int) {
	for place := range tab.places {
		p := &tab.places[place]
		for l := range p.levels {
			var n [2]int
			for g, group := range [2]int{reference, focal} {
				if c := p.counts[group]; c != nil {
					n[g] = int(c.n[l])
				}
			}
			apart := place == alone || p.lone && l == 0
			if apart || n[0] == 0 {
				lost[1] += n[1]
			}
			if apart || n[1] == 0 {
				lost[0] += n[0]
			}
		}
	}
	return lost
}

// reliability returns coefficient alpha of the matching score over both groups: over all
// candidates where they were presented the same items, else the mean over presented sets or
// forms that hold both groups, weighted by candidates. Sets with less than a tenth of the
// candidates of the largest one are left out, so that a handful of people does not speak
// for the score.
func (t *tabulator) reliability(tab *tabulation, matching []int, groups [2]int) float64 {
	if t.external != nil {
		return math.NaN()
	}
	a := t.arrangement
	sizes := make([]int, len(tab.places))
	for place := 1; place < len(tab.places); place++ {
		for _, ri := range tab.places[place].runs {
			if r := a.runs[ri]; r.group == groups[0] || r.group == groups[1] {
				sizes[place] += r.to - r.from
			}
		}
	}
	for place := range sizes {
		if c := tab.places[place].counts; c[groups[0]] == nil || c[groups[1]] == nil {
			sizes[place] = 0 // whom nobody is compared with, whatever other comparisons there are
		}
	}
	largest := slices.Max(sizes)
	var weighted, n float64
	for place := 1; place < len(tab.places); place++ {
		if sizes[place] == 0 || 10*sizes[place] < largest {
			continue
		}
		var items []int
		for _, i := range matching {
			if a.packed.sets[a.sets[place-1]].items[i] {
				items = append(items, i)
			}
		}
		if v := tab.places[place].alpha(a.packed, items, groups); !math.IsNaN(v) {
			weighted += v * float64(sizes[place])
			n += float64(sizes[place])
		}
	}
	if n == 0 {
		return math.NaN()
	}
	return weighted / n
}

// alpha returns coefficient alpha over the given items and groups of one place.
func (p *placeTables) alpha(packed *packed, items []int, groups [2]int) float64 {
	var n int
	var scores []float64
	var counts []uint32
	for l := range p.levels {
		var m uint32
		for _, g := range groups {
			if c := p.counts[g]; c != nil {
				m += c.n[l]
			}
		}
		n += int(m)
		scores, counts = append(scores, p.score(l)), append(counts, m)
	}
	if n < 2 {
		return math.NaN()
	}
	itemSS := make([]float64, len(items))
	for j, item := range items {
		first, width := packed.itemPlanes(item)
		var x, xx float64 // Σx and Σx²; x² is the sum of 2k−1 over k = 1..x
		for k := range width {
			var reached float64
			for _, g := range groups {
				if c := p.counts[g]; c != nil {
					for l := range p.levels {
						reached += float64(c.right[l*c.planes+first+k])
					}
				}
			}
			x += reached
			xx += float64(2*k+1) * reached
		}
		itemSS[j] = xx - x*x/float64(n)
	}
	return coefficientAlpha(itemSS, weightedMoments(scores, counts).ss)
}

// scoreCorrelation returns the correlation of the external score with the total on the
// masked planes over both groups; NaN where candidates are matched otherwise.
func (t *tabulator) scoreCorrelation(mask []uint64, groups [2]int) float64 {
	if t.external == nil {
		return math.NaN()
	}
	a, w := t.arrangement, t.arrangement.packed.words
	var scores []float64
	var totals []int32
	for _, r := range a.runs {
		if r.group == groups[0] || r.group == groups[1] {
			scores = append(scores, t.external[r.from:r.to]...)
			total := make([]int32, r.to-r.from)
			scoreRows(total, a.rows[r.from*w:r.to*w], mask)
			totals = append(totals, total...)
		}
	}
	var mean float64
	for _, s := range scores {
		mean += s / float64(len(scores))
	}
	var m moments
	for i, s := range scores { // deviations from the mean keep the sums accurate
		m.add(1, float64(totals[i]), s-mean)
	}
	return m.correlation()
}

// externalItemRest returns the correlation of every item with the external score, per
// group, over candidates with a scored response.
func (t *tabulator) externalItemRest(groups [2]int) []ItemRest {
	p := t.arrangement.packed
	sums := make([][2]moments, len(p.data.Items))
	for g, group := range groups {
		var mean, n float64
		for _, r := range t.arrangement.runs {
			if r.group == group {
				for _, s := range t.external[r.from:r.to] {
					mean += s
					n++
				}
			}
		}
		mean /= n // deviations from the mean keep the sums accurate
		for _, r := range t.arrangement.runs {
			if r.group != group {
				continue
			}
			for i := r.from; i < r.to; i++ {
				c := int(t.arrangement.order[i])
				tables := p.scores[p.form(c)]
				for item, code := range p.data.Answers.Row(c) {
					if s := tables[item][code]; s != noScore {
						sums[item][g].add(1, float64(s), t.external[i]-mean)
					}
				}
			}
		}
	}
	out := make([]ItemRest, len(sums))
	for i := range sums {
		out[i] = ItemRest{number(sums[i][0].correlation()), number(sums[i][1].correlation())}
	}
	return out
}
