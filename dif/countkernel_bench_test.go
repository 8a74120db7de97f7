package dif

import (
	"encoding/binary"
	"math"
	"math/rand/v2"
	"slices"
	"sync"
	"testing"
	"time"
)

// The data of the counting benchmarks: a million candidates in six groups of
// unequal size, a hundred items of a two-parameter logistic model, groups
// differing in mean ability. Candidates of one group are contiguous in every
// form of the data, the byte matrix too, which spares the byte loop the cache
// misses it would have on candidates in order of arrival.
const (
	benchCandidates = 1_000_000
	benchItems      = 100
	benchGroups     = 6
	benchSteps      = 4 // score steps of the polytomous items, scores 0..4
)

type countBenchData struct {
	scores []uint8 // candidate-major 0/1 scores
	group  []uint8 // group code of each candidate
	packed []uint64
	binary []countRun // one a group, complete
	poly   []countRun // one a group, 400 planes
	gaps   []countRun // two a group: complete, then a tenth of the group incomplete
}

var countBench = sync.OnceValue(func() *countBenchData {
	const (
		words     = (benchItems + 63) / 64
		polyWords = (benchItems*benchSteps + 63) / 64
		abilities = 512
	)
	random := rand.New(rand.NewPCG(20260401, 7))

	// chance[(a*benchItems+j)*benchSteps+k] is the probability, in units of
	// 2^-32, of a score above k on item j at ability a of a fine grid.
	chance := make([]uint32, abilities*benchItems*benchSteps)
	for j := range benchItems {
		slope := math.Exp(0.3 * random.NormFloat64())
		place := random.NormFloat64()
		for a := range abilities {
			theta := -4 + 8*float64(a)/(abilities-1)
			for k := range benchSteps {
				// The binary item is the second step of the polytomous one.
				p := 1 / (1 + math.Exp(-slope*(theta-place-0.8*float64(k-1))))
				chance[(a*benchItems+j)*benchSteps+k] = uint32(p * (1<<32 - 1))
			}
		}
	}

	d := &countBenchData{
		scores: make([]uint8, benchCandidates*benchItems),
		group:  make([]uint8, benchCandidates),
		packed: make([]uint64, benchCandidates*words),
	}
	poly := make([]uint64, benchCandidates*polyWords)
	matching, polyMatching := benchMask(benchItems), benchMask(benchItems*benchSteps)
	shares := [benchGroups]int{32, 26, 18, 12, 8, 4} // percent
	first := 0
	for g, share := range shares {
		end := first + benchCandidates/100*share
		for i := first; i < end; i++ {
			d.group[i] = uint8(g)
			theta := random.NormFloat64() - 0.1*float64(g)
			a := int(min(max((theta+4)/8*(abilities-1), 0), abilities-1))
			for j := range benchItems {
				draw := random.Uint32()
				for k, c := range chance[(a*benchItems+j)*benchSteps:][:benchSteps] {
					if draw < c {
						p := j*benchSteps + k
						poly[i*polyWords+p/64] |= 1 << (p % 64)
						if k == 1 {
							d.scores[i*benchItems+j] = 1
							d.packed[i*words+j/64] |= 1 << (j % 64)
						}
					}
				}
			}
		}
		rows := d.packed[first*words : end*words]
		d.binary = append(d.binary, countRun{rows: rows, words: words, mask: matching})
		d.poly = append(d.poly, countRun{rows: poly[first*polyWords : end*polyWords], words: polyWords, mask: polyMatching})

		// The incomplete candidates did not reach the last items, 1 to 20.
		complete := (end - first) / 10 * 9 * words
		gaps, answered := slices.Clone(rows), make([]uint64, len(rows)-complete)
		for at := complete; at < len(gaps); at += words {
			reached := benchMask(benchItems - 1 - random.IntN(20))
			for k, w := range reached {
				answered[at-complete+k] = w
				gaps[at+k] &= w
			}
			if len(reached) < words {
				gaps[at+1] = 0
			}
		}
		d.gaps = append(d.gaps,
			countRun{rows: gaps[:complete], words: words, mask: matching},
			countRun{rows: gaps[complete:], answered: answered, words: words, mask: matching})
		first = end
	}
	return d
})

// benchMask returns the words of a mask of planes 0..planes-1.
func benchMask(planes int) []uint64 {
	mask := make([]uint64, (planes+63)/64)
	for p := range planes {
		mask[p/64] |= 1 << (p % 64)
	}
	return mask
}

// countByteRows is the baseline: totals and counts straight from a matrix with
// a byte per answer. counts are laid out as n[group][score] and
// right[group][score][item].
func countByteRows(scores, group []uint8, items int, n, right []uint32) {
	for i, g := range group {
		row := scores[i*items : (i+1)*items]
		total := 0
		for _, x := range row {
			total += int(x)
		}
		cell := int(g)*(items+1) + total
		n[cell]++
		counts := right[cell*items:][:len(row)]
		for j, x := range row {
			counts[j] += uint32(x)
		}
	}
}

// streamWords reads the words once and does next to nothing with them.
func streamWords(words []uint64) uint64 {
	var x uint64
	for _, w := range words {
		x ^= w
	}
	return x
}

// streamBytes is streamWords for bytes, read eight at a time.
func streamBytes(bytes []uint8) uint64 {
	var x uint64
	for ; len(bytes) >= 8; bytes = bytes[8:] {
		x ^= binary.LittleEndian.Uint64(bytes)
	}
	return x
}

// countPass is one pass over all runs, as every benchmark times it: the tables
// are cleared, then each run is added to the table of its group.
type countPass struct {
	runs    []countRun
	tables  []*levelCounts
	scratch countScratch
}

func newCountPass(runs []countRun, planes int) *countPass {
	p := &countPass{runs: runs}
	for range benchGroups {
		p.tables = append(p.tables, newLevelCounts(planes+1, planes))
	}
	return p
}

func (p *countPass) run() {
	for _, t := range p.tables {
		clear(t.n)
		clear(t.right)
		clear(t.missing)
	}
	each := len(p.runs) / len(p.tables)
	for i, r := range p.runs {
		p.tables[i/each].count(r, &p.scratch)
	}
}

// medianTimes runs the steps in turn for a number of rounds and returns the
// median time of each in seconds.
func medianTimes(rounds int, steps ...func()) []float64 {
	times := make([][]float64, len(steps))
	for range rounds {
		for i, step := range steps {
			start := time.Now()
			step()
			times[i] = append(times[i], time.Since(start).Seconds())
		}
	}
	medians := make([]float64, len(steps))
	for i, t := range times {
		slices.Sort(t)
		medians[i] = t[len(t)/2]
	}
	return medians
}

var benchSink uint64

func BenchmarkStreamPackedRows(b *testing.B) {
	d := countBench()
	b.SetBytes(int64(8 * len(d.packed)))
	for b.Loop() {
		benchSink ^= streamWords(d.packed)
	}
	b.ReportMetric(float64(8*len(d.packed)*b.N)/b.Elapsed().Seconds()/1e9, "GB/s")
}

func BenchmarkStreamByteRows(b *testing.B) {
	d := countBench()
	b.SetBytes(int64(len(d.scores)))
	for b.Loop() {
		benchSink ^= streamBytes(d.scores)
	}
	b.ReportMetric(float64(len(d.scores)*b.N)/b.Elapsed().Seconds()/1e9, "GB/s")
}

func BenchmarkMHTablesByteLoop(b *testing.B) {
	d := countBench()
	n := make([]uint32, benchGroups*(benchItems+1))
	right := make([]uint32, benchGroups*(benchItems+1)*benchItems)
	for b.Loop() {
		clear(n)
		clear(right)
		countByteRows(d.scores, d.group, benchItems, n, right)
	}
}

// BenchmarkMHTables times one counting pass on one core: over complete binary
// rows against the byte loop and against a mere read of the packed rows, and
// over incomplete and polytomous rows against the binary pass.
func BenchmarkMHTables(b *testing.B) {
	d := countBench()
	plain := newCountPass(d.binary, benchItems)

	b.Run("1e6x100x6", func(b *testing.B) {
		n := make([]uint32, benchGroups*(benchItems+1))
		right := make([]uint32, benchGroups*(benchItems+1)*benchItems)
		byteLoop := func() {
			clear(n)
			clear(right)
			countByteRows(d.scores, d.group, benchItems, n, right)
		}
		byteLoop()
		plain.run()
		for g, t := range plain.tables {
			if !slices.Equal(t.n, n[g*t.levels:(g+1)*t.levels]) ||
				!slices.Equal(t.right, right[g*len(t.right):(g+1)*len(t.right)]) {
				b.Fatalf("the tables of group %d differ from those of the byte loop", g)
			}
		}
		// The byte loop before the pass and before the stream leaves the
		// caches in the same state for both: without the packed rows.
		t := medianTimes(25, byteLoop, plain.run, byteLoop, func() { benchSink ^= streamWords(d.packed) })
		for b.Loop() {
			plain.run()
		}
		b.ReportMetric(min(t[0], t[2])/t[1], "x_byteloop")
		b.ReportMetric(t[1]/t[3], "x_stream")
	})
	b.Run("missing10pct", func(b *testing.B) {
		againstBinary(b, newCountPass(d.gaps, benchItems), plain)
	})
	b.Run("poly5", func(b *testing.B) {
		againstBinary(b, newCountPass(d.poly, benchItems*benchSteps), plain)
	})
}

// againstBinary times a pass and reports how many times as long it takes as
// the pass over binary rows.
func againstBinary(b *testing.B, pass, binary *countPass) {
	pass.run()
	check := newCountPass(pass.runs, pass.tables[0].planes)
	each := len(check.runs) / len(check.tables)
	for i, r := range check.runs {
		check.tables[i/each].countSparse(r, &check.scratch)
	}
	for g, t := range pass.tables {
		c := check.tables[g]
		if !slices.Equal(t.n, c.n) || !slices.Equal(t.right, c.right) || !slices.Equal(t.missing, c.missing) {
			b.Fatalf("the tables of group %d differ from those counted bit by bit", g)
		}
	}
	t := medianTimes(31, pass.run, binary.run)
	for b.Loop() {
		pass.run()
	}
	b.ReportMetric(t[0]/t[1], "x_binary")
}
