package dif

import (
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"math/rand/v2"
	"slices"
	"testing"
)

// countBitByBit is the reference for every test here: it looks at each bit of
// each row on its own.
func countBitByBit(t *levelCounts, run countRun) {
	has := func(words []uint64, row, p int) bool {
		return words[row*run.words+p/64]>>(p%64)&1 == 1
	}
	for i := range run.size() {
		level := 0
		if run.level != nil {
			level = int(run.level[i])
		} else {
			for p := range run.words * 64 {
				if run.mask[p/64]>>(p%64)&1 == 1 && has(run.rows, i, p) {
					level++
				}
			}
		}
		t.n[level]++
		for p := range t.planes {
			if has(run.rows, i, p) {
				t.right[level*t.planes+p]++
			}
			if run.answered != nil && !has(run.answered, i, p) {
				t.needMissing()
				t.missing[level*t.planes+p]++
			}
		}
	}
}

// randomRun returns a run of size rows over planes planes. With gaps, one bit
// in ten is not answered.
func randomRun(random *rand.Rand, size, planes int, supplied, gaps bool, levels int) countRun {
	words := (planes + 63) / 64
	run := countRun{rows: make([]uint64, size*words), words: words}
	if gaps {
		run.answered = make([]uint64, size*words)
	}
	for i := range size {
		ability := random.Float64()
		for p := range planes {
			answered := !gaps || random.IntN(10) > 0
			if gaps && answered {
				run.answered[i*words+p/64] |= 1 << (p % 64)
			}
			if answered && random.Float64() < ability {
				run.rows[i*words+p/64] |= 1 << (p % 64)
			}
		}
	}
	if supplied {
		run.level = make([]int32, size)
		for i := range run.level {
			run.level[i] = int32(random.IntN(levels))
		}
	} else {
		run.mask = make([]uint64, words)
		for p := range planes {
			if random.IntN(4) > 0 { // a quarter outside the matching set
				run.mask[p/64] |= 1 << (p % 64)
			}
		}
	}
	return run
}

func sameCounts(t *testing.T, got, want *levelCounts) {
	t.Helper()
	if !slices.Equal(got.n, want.n) {
		t.Errorf("candidates per level: got %v, want %v", got.n, want.n)
	}
	if !slices.Equal(got.right, want.right) {
		t.Error("counts of set planes differ")
	}
	for s := range want.levels {
		for p := range want.planes {
			if g, w := got.answered(s, p), want.answered(s, p); g != w {
				t.Fatalf("answered at level %d, plane %d: got %d, want %d", s, p, g, w)
			}
		}
	}
}

func TestCountsAgainstBitByBit(t *testing.T) {
	t.Parallel()
	for words := 1; words <= 9; words++ {
		for _, size := range []int{0, 1, 15, 16, 17, 63, 64, 65, 1000} {
			for _, supplied := range []bool{false, true} {
				for _, gaps := range []bool{false, true} {
					name := fmt.Sprintf("%d words/%d rows/supplied %t/gaps %t", words, size, supplied, gaps)
					t.Run(name, func(t *testing.T) {
						t.Parallel()
						random := rand.New(rand.NewPCG(uint64(words), uint64(size)))
						planes := 64*words - random.IntN(64)
						levels := planes + 1
						if supplied {
							levels = 5
						}
						run := randomRun(random, size, planes, supplied, gaps, levels)
						want := newLevelCounts(levels, planes)
						countBitByBit(want, run)

						got := newLevelCounts(levels, planes)
						got.count(run, new(countScratch))
						sameCounts(t, got, want)

						sparse := newLevelCounts(levels, planes)
						sparse.countSparse(run, new(countScratch))
						sameCounts(t, sparse, want)

						// The lanes even where count would not use them.
						lanes := newLevelCounts(levels, planes)
						if size > 0 {
							lanes.countLanes(run, new(countScratch))
						}
						sameCounts(t, lanes, want)
					})
				}
			}
		}
	}
}

// Enough rows at few levels to carry through every tier of a lane, and counts
// of more than 16 bits.
func TestCountsManyRows(t *testing.T) {
	t.Parallel()
	const size = 100_000
	for words := 1; words <= 5; words++ {
		t.Run(fmt.Sprintf("%d words", words), func(t *testing.T) {
			t.Parallel()
			random := rand.New(rand.NewPCG(uint64(words), 1))
			planes := 64*words - 13
			run := randomRun(random, size, planes, false, words == 2, 0)
			for i := range run.mask { // a short matching set: five levels
				run.mask[i] = 0
			}
			run.mask[words-1] = 0b1111
			want := newLevelCounts(5, planes)
			countBitByBit(want, run)
			got := newLevelCounts(5, planes)
			got.count(run, new(countScratch))
			sameCounts(t, got, want)

			// All candidates at one level.
			run.level = make([]int32, size)
			want = newLevelCounts(2, planes)
			countBitByBit(want, run)
			got = newLevelCounts(2, planes)
			got.count(run, new(countScratch))
			sameCounts(t, got, want)
		})
	}
}

// Every bit set in every row: the counts are the number of rows, whatever that
// is made of.
func TestCountsOfFullRows(t *testing.T) {
	t.Parallel()
	const planes = 128
	for _, size := range []int{255, 256, 511, 512, 513, 4095, 4096, 4097, 32768, 65535, 65536, 65537, 200_000} {
		rows := make([]uint64, 2*size)
		for i := range rows {
			rows[i] = ^uint64(0)
		}
		got := newLevelCounts(2, planes)
		got.count(countRun{rows: rows, words: 2, level: make([]int32, size)}, new(countScratch))
		for p, c := range got.rightOf(0) {
			if c != uint32(size) {
				t.Fatalf("%d full rows: plane %d counted %d times", size, p, c)
			}
		}
	}
}

// Sizes around those of the batches a run is sorted in: a batch is at least 64
// rows, about an eighth of the run, at most maxBatch and, with many levels, less.
func TestCountsAroundBatches(t *testing.T) {
	t.Parallel()
	for _, test := range []struct{ size, planes, levels int }{
		{8*64 - 1, 100, 0}, {8 * 64, 100, 0}, {8*64 + 1, 100, 0}, {8*65 + 3, 100, 0},
		{8*1000 + 7, 40, 0}, {8*1024 + 1, 128, 0},
		{8*maxBatch - 1, 20, 0}, {8 * maxBatch, 20, 0}, {8*maxBatch + maxBatch + 1, 20, 0},
		{8 * maxBatch, 20, 3}, {9*maxBatch + 17, 12, 300},
		{40_000, 10, 4000}, // few places a level
		{5000, 150, 1}, {5000, 70, 1},
	} {
		for _, gaps := range []bool{false, true} {
			t.Run(fmt.Sprintf("%d rows/%d planes/%d levels/gaps %t", test.size, test.planes, test.levels, gaps), func(t *testing.T) {
				t.Parallel()
				random := rand.New(rand.NewPCG(uint64(test.size), uint64(test.planes)))
				supplied, levels := test.levels > 0, test.levels
				if !supplied {
					levels = test.planes + 1
				}
				run := randomRun(random, test.size, test.planes, supplied, gaps, levels)
				want := newLevelCounts(levels, test.planes)
				countBitByBit(want, run)
				got := newLevelCounts(levels, test.planes)
				got.countLanes(run, new(countScratch))
				sameCounts(t, got, want)
			})
		}
	}
}

// The number of rows of a level, between 0 and a few folds, whatever is left
// over of it; the other level of the table has one row more each time.
func TestCountsOfLeftovers(t *testing.T) {
	t.Parallel()
	random := rand.New(rand.NewPCG(3, 14))
	scratch := new(countScratch)
	for _, planes := range []int{64, 100, 200} {
		for size := range 4*foldStep + 2 {
			run := randomRun(random, 2*size+1, planes, true, size%2 == 0, 2)
			for i := range run.level {
				run.level[i] = int32(i % 2)
			}
			want := newLevelCounts(2, planes)
			countBitByBit(want, run)
			got := newLevelCounts(2, planes)
			got.countLanes(run, scratch)
			sameCounts(t, got, want)
		}
	}
}

// Every level has one row.
func TestCountsOfLoneRows(t *testing.T) {
	t.Parallel()
	random := rand.New(rand.NewPCG(2, 71))
	for _, words := range []int{1, 2, 3} {
		planes := 64 * words
		run := randomRun(random, planes+1, planes, false, false, 0)
		run.mask = benchMask(planes)
		for i := range planes + 1 { // row i has i bits
			clear(run.rows[i*words : (i+1)*words])
			for _, p := range random.Perm(planes)[:i] {
				run.rows[i*words+p/64] |= 1 << (p % 64)
			}
		}
		want := newLevelCounts(planes+1, planes)
		countBitByBit(want, run)
		got := newLevelCounts(planes+1, planes)
		got.countLanes(run, new(countScratch))
		sameCounts(t, got, want)
	}
}

// All rows equal: each count is 0 or the number of rows, which at 70,000 no
// longer fits 16 bits.
func TestCountsOfEqualRows(t *testing.T) {
	t.Parallel()
	const size = 70_000
	row := []uint64{0x0123456789abcdef, 0x0f1e2d3c4b5a6978, 0xf0}
	for words := 1; words <= len(row); words++ {
		planes := 64 * words
		run := countRun{words: words, mask: benchMask(planes)}
		for range size {
			run.rows = append(run.rows, row[:words]...)
		}
		want := newLevelCounts(planes+1, planes)
		countBitByBit(want, run)
		got := newLevelCounts(planes+1, planes)
		got.count(run, new(countScratch))
		sameCounts(t, got, want)
	}
}

// A level the table does not have is an error of the caller, not a count.
func TestCountsPanicOutsideTheTable(t *testing.T) {
	t.Parallel()
	for _, words := range []int{1, 2, 3} {
		run := countRun{rows: make([]uint64, 100*words), words: words, mask: benchMask(64 * words)}
		for i := range run.rows {
			run.rows[i] = 0b111
		}
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%d words: level %d of a table of 3 levels was counted", words, 3*words)
				}
			}()
			newLevelCounts(3, 64*words).countLanes(run, new(countScratch))
		}()
	}
}

// One scratch serves runs of different widths and tables of different sizes.
func TestCountScratchIsReused(t *testing.T) {
	t.Parallel()
	random := rand.New(rand.NewPCG(5, 5))
	scratch := new(countScratch)
	for _, planes := range []int{100, 30, 100, 300, 120, 30, 64} {
		run := randomRun(random, 40*planes, planes, false, planes == 300, 0)
		want := newLevelCounts(planes+1, planes)
		countBitByBit(want, run)
		got := newLevelCounts(planes+1, planes)
		got.countLanes(run, scratch)
		sameCounts(t, got, want)
	}
}

func TestCountRunsAnyOrderAnyWorkers(t *testing.T) {
	t.Parallel()
	random := rand.New(rand.NewPCG(9, 9))
	const planes, levels = 70, 71
	mask := benchMask(planes)
	var runs []countRun
	var tableOf []int
	for i, size := range []int{900, 0, 3000, 12_000, 300_000, 70} {
		run := randomRun(random, size, planes, false, i%2 == 0 && size < 100_000, 0)
		run.mask = mask
		runs = append(runs, run)
		tableOf = append(tableOf, i%2)
	}
	newTables := func() []*levelCounts {
		return []*levelCounts{newLevelCounts(levels, planes), newLevelCounts(levels, planes)}
	}
	want := newTables()
	for i, run := range runs {
		countBitByBit(want[tableOf[i]], run)
	}
	for _, workers := range []int{0, 1, 2, 3, 8} {
		got := newTables()
		if err := countRuns(t.Context(), runs, got, tableOf, workers); err != nil {
			t.Fatalf("%d workers: %v", workers, err)
		}
		for i := range got {
			sameCounts(t, got[i], want[i])
		}
	}
	slices.Reverse(runs)
	slices.Reverse(tableOf)
	got := newTables()
	if err := countRuns(t.Context(), runs, got, tableOf, 2); err != nil {
		t.Fatal(err)
	}
	for i := range got {
		sameCounts(t, got[i], want[i])
	}
}

func TestCountRunsCancelled(t *testing.T) {
	t.Parallel()
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	run := randomRun(rand.New(rand.NewPCG(1, 1)), 500, 10, false, false, 0)
	table := newLevelCounts(11, 10)
	err := countRuns(ctx, []countRun{run}, []*levelCounts{table}, []int{0}, 2)
	if !errors.Is(err, context.Canceled) {
		t.Errorf("got error %v, want %v", err, context.Canceled)
	}
	sameCounts(t, table, newLevelCounts(11, 10))
}

// Whatever the bytes are taken for, lanes, sparse counting and the reference
// agree.
func FuzzCounts(f *testing.F) {
	f.Add(uint8(1), uint8(3), uint8(0), []byte("\x01\x02\x03\x04\x05\x06\x07\x08"))
	f.Add(uint8(100), uint8(0), uint8(1), make([]byte, 1024))
	f.Add(uint8(200), uint8(1), uint8(3), slices.Repeat([]byte{0xff, 0x0f, 0x33}, 700))
	f.Add(uint8(255), uint8(64), uint8(2), slices.Repeat([]byte{0xaa}, 3000))
	f.Fuzz(func(t *testing.T, planes8, maskSeed, flags uint8, data []byte) {
		planes := int(planes8) + 1
		words := (planes + 63) / 64
		supplied, gaps := flags&1 != 0, flags&2 != 0
		run := countRun{words: words}
		size := len(data) / 8 / words
		for len(run.rows) < size*words {
			run.rows = append(run.rows, binary.LittleEndian.Uint64(data[8*len(run.rows):]))
		}
		if gaps {
			// The rows in reverse stand for what was answered.
			run.answered = slices.Clone(run.rows)
			slices.Reverse(run.answered)
		}
		// Bits after the last plane may be set in the rows, not in the mask.
		run.mask = benchMask(planes)
		for k := range run.mask {
			run.mask[k] &^= 1 << (maskSeed % 64)
		}
		levels := planes + 1
		if supplied {
			levels = int(maskSeed) + 1
			for i := range size {
				run.level = append(run.level, int32(data[i])%int32(levels))
			}
			if size == 0 {
				run.level = []int32{}
			}
		}
		want := newLevelCounts(levels, planes)
		countBitByBit(want, run)
		for name, count := range map[string]func(*levelCounts, countRun, *countScratch){
			"count": (*levelCounts).count, "sparse": (*levelCounts).countSparse, "lanes": (*levelCounts).countLanes,
		} {
			if size == 0 && name == "lanes" {
				continue
			}
			got := newLevelCounts(levels, planes)
			count(got, run, new(countScratch))
			sameCounts(t, got, want)
			if t.Failed() {
				t.Fatalf("counted by %s", name)
			}
		}
	})
}
