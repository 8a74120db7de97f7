package dif

import (
	"context"
	"math/bits"
)

type levelCounts struct {
	levels, planes int
	n              []uint32
	right          []uint32
	missing        []uint32
}

func newLevelCounts(levels, planes int) *levelCounts {
	return &levelCounts{levels: levels, planes: planes, n: make([]uint32, levels), right: make([]uint32, levels*planes), missing: make([]uint32, levels*planes)}
}

type countRun struct {
	rows, answered []uint64
	words          int
	mask           []uint64
	level          []int32
}

func countParallel(ctx context.Context, runs []countRun, tables []*levelCounts, workers int) error {
	for i, r := range runs {
		t := tables[i]
		for j := 0; j*r.words < len(r.rows); j++ {
			row := r.rows[j*r.words : (j+1)*r.words]
			l := 0
			if r.level != nil {
				l = int(r.level[j])
			} else {
				for k, m := range r.mask {
					l += bits.OnesCount64(row[k] & m)
				}
			}
			t.n[l]++
			for p := 0; p < t.planes; p++ {
				t.right[l*t.planes+p] += uint32(row[p/64] >> (p % 64) & 1)
				if r.answered != nil {
					t.missing[l*t.planes+p] += 1 - uint32(r.answered[j*r.words+p/64]>>(p%64)&1)
				}
			}
		}
	}
	return ctx.Err()
}
