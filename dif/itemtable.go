package dif

// ItemTable holds the counts of one item in one comparison: candidates who have a
// label, a matching score and a scored response, by stratum, group and item score.
type ItemTable struct {
	Categories int       // maximum score + 1
	Strata     []Stratum // each with at least one candidate; by set, then score
	Counts     []uint32  // len(Strata) x 2 x Categories: reference scores 0..m, then focal
}

// Stratum is one level of the matching variable, within one presented set.
type Stratum struct {
	Set   int     // 0 unless candidates are matched within the set presented
	Score float64 // the matching score
}

// Binary reports whether the item is scored 0 or 1.
func (t *ItemTable) Binary() bool { return t.Categories == 2 }

// group returns the counts by item score of one group (0 reference, 1 focal) in stratum k.
func (t *ItemTable) group(k, g int) []uint32 {
	from := (2*k + g) * t.Categories
	return t.Counts[from : from+t.Categories]
}

// table2x2 returns the cells of stratum k of a binary item.
func (t *ItemTable) table2x2(k int) cells {
	c := t.Counts[4*k : 4*k+4 : 4*k+4]
	return cells{a: float64(c[1]), b: float64(c[0]), c: float64(c[3]), d: float64(c[2])}
}

// cells is a 2x2 table: reference right and wrong, focal right and wrong.
type cells struct{ a, b, c, d float64 }

func (x cells) reference() float64 { return x.a + x.b }
func (x cells) focal() float64     { return x.c + x.d }
func (x cells) total() float64     { return x.a + x.b + x.c + x.d }
func (x cells) right() float64     { return x.a + x.c }
func (x cells) wrong() float64     { return x.b + x.d }

// comparable reports whether both groups are present. A one-group stratum is
// skipped by every statistic.
func (x cells) comparable() bool { return x.reference() > 0 && x.focal() > 0 }

// informative reports whether a comparable stratum holds both right and wrong
// answers. Only such a stratum says anything about the odds ratio.
func (x cells) informative() bool {
	return x.comparable() && x.right() > 0 && x.wrong() > 0
}

// variance is the hypergeometric variance of the cell a given the margins.
func (x cells) variance() float64 {
	t := x.total()
	return x.reference() * x.focal() * x.right() * x.wrong() / (t * t * (t - 1))
}

// coverage counts strata and candidates by what they can contribute.
type coverage struct {
	n                       [2]int // candidates by group
	matched                 [2]int // in comparable strata
	comparable, informative int    // strata
	informativeN            int    // candidates in informative strata
	scoreSum                [2]int
	lowest, highest         [2]int  // item score by group; lowest > highest: nobody
	medianT                 float64 // candidates of the median comparable stratum
	direction               int     // of an odds ratio without limit, see mhSums.limitless
}

// cover counts what the table holds.
func (t *ItemTable) cover() coverage {
	c := coverage{lowest: [2]int{t.Categories, t.Categories}, highest: [2]int{-1, -1}}
	var sizes []int
	for k := range t.Strata {
		var n [2]int
		seen := 0
		for j := 0; j < t.Categories; j++ {
			any := false
			for g := range n {
				m := int(t.group(k, g)[j])
				if m == 0 {
					continue
				}
				any = true
				n[g] += m
				c.scoreSum[g] += j * m
				c.lowest[g], c.highest[g] = min(c.lowest[g], j), max(c.highest[g], j)
			}
			if any {
				seen++
			}
		}
		c.n[0] += n[0]
		c.n[1] += n[1]
		if n[0] == 0 || n[1] == 0 {
			continue
		}
		c.comparable++
		c.matched[0] += n[0]
		c.matched[1] += n[1]
		sizes = append(sizes, n[0]+n[1])
		if seen > 1 {
			c.informative++
			c.informativeN += n[0] + n[1]
		}
	}
	c.medianT = median(sizes)
	if t.Binary() {
		c.direction = sumStrata(t).limitless()
	}
	return c
}
