package dif

import (
	"context"
	"sync"
	"sync/atomic"
)

// countRange is about how many candidates a worker counts at a time. Draining
// the lanes after each range costs about a twentieth of counting it.
const countRange = 250_000

// countRuns adds every run to its table: runs[i] to tables[tableOf[i]]. It
// splits runs into ranges and hands those to workers goroutines (at least one).
// The counts are exact, so they do not depend on the number of workers.
//
// It stops between ranges when ctx is cancelled and then returns the error of
// ctx; the tables are left as they were.
func countRuns(ctx context.Context, runs []countRun, tables []*levelCounts, tableOf []int, workers int) error {
	type unit struct {
		run   countRun
		table int
	}
	var units []unit
	for i, run := range runs {
		size := run.size()
		parts := (size + countRange - 1) / countRange
		for k := range parts {
			units = append(units, unit{run.part(k*size/parts, (k+1)*size/parts), tableOf[i]})
		}
	}

	var next atomic.Int64
	count := func() []*levelCounts {
		sums := make([]*levelCounts, len(tables))
		scratch := new(countScratch)
		for {
			k := int(next.Add(1)) - 1
			if k >= len(units) || ctx.Err() != nil {
				return sums
			}
			u := units[k]
			if sums[u.table] == nil {
				sums[u.table] = newLevelCounts(tables[u.table].levels, tables[u.table].planes)
			}
			sums[u.table].count(u.run, scratch)
		}
	}

	workers = max(1, min(workers, len(units)))
	sums := make([][]*levelCounts, workers)
	var group sync.WaitGroup
	for w := 1; w < workers; w++ {
		group.Go(func() { sums[w] = count() })
	}
	sums[0] = count()
	group.Wait()

	if err := ctx.Err(); err != nil {
		return err
	}
	for _, of := range sums {
		for i, sum := range of {
			if sum != nil {
				tables[i].add(sum)
			}
		}
	}
	return nil
}
