package reports

import (
	"testing"

	"github.com/google/go-cmp/cmp"
)

func rowsOf(n int, height float64) []float64 {
	heights := make([]float64, n)
	for i := range heights {
		heights[i] = height
	}
	return heights
}

// Worked out by hand: rows of 5 mm, 100 mm on a page.
func TestLayRows(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		name              string
		rows              int
		height            float64
		first, next, tail float64
		counts            []int
		pad               float64
	}{
		{"one page", 20, 5, 100, 100, 0, []int{20}, 1},
		{"one row too many is taken in closer", 21, 5, 100, 100, 0, []int{21}, 0.85}, // 21 of 4.7 are 98.7
		{"so are two", 22, 5, 100, 100, 0, []int{22}, 0.7},                           // of 4.4
		{"and the note below", 20, 5, 100, 100, 8, []int{20}, 0.7},                   // 20 of 4.4, and 8, are 96
		{"tall rows gain little: they move", 11, 10, 100, 100, 0, []int{8, 3}, 1},    // 11 of 9.1 are 100.1
		{"three rows may stand alone", 23, 5, 100, 100, 0, []int{20, 3}, 1},
		{"later pages", 41, 20, 100, 100, 0, []int{5, 5, 5, 5, 5, 5, 5, 3, 3}, 1},
		{"no page of its own can be saved", 1, 5, 10, 10, 100, []int{1}, 1},
	} {
		counts, pad := layRows(rowsOf(c.rows, c.height), c.first, c.next, c.tail)
		if diff := cmp.Diff(c.counts, counts); diff != "" || !(abs(pad-c.pad) < 1e-12) {
			t.Errorf("%s: %v with %v, want %v with %v", c.name, counts, pad, c.counts, c.pad)
		}
	}
}

// No row is lost and no page is empty, whatever the heights.
func TestLayRowsKeepsEveryRow(t *testing.T) {
	t.Parallel()
	for n := 1; n < 200; n++ {
		heights := rowsOf(n, 4)
		for i := range heights {
			heights[i] += float64(i * 7 % 13)
		}
		counts, _ := layRows(heights, 60, 150, 20)
		total := 0
		for p, k := range counts {
			if k < 1 {
				t.Fatalf("%d rows: page %d of %v is empty", n, p+1, counts)
			}
			total += k
		}
		if last := counts[len(counts)-1]; total != n || len(counts) > 1 && last < fewestRows && counts[len(counts)-2] > fewestRows {
			t.Fatalf("%d rows are laid out as %v", n, counts)
		}
	}
}
