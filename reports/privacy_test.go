package reports

import (
	"math/rand/v2"
	"testing"

	"github.com/google/go-cmp/cmp"
)

func words(counts []count) []string {
	var out []string
	for _, c := range counts {
		out = append(out, c.record())
	}
	return out
}

// The first two cells are those without a label and of labels not compared.
func TestGuardedSplit(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		name  string
		cells []int
		want  []string
	}{
		{"nothing small", []int{0, 0, 250, 50}, []string{"0", "0", "250", "50"}},
		{"one small group takes the next smallest along", []int{40, 0, 250, 7, 90}, []string{"withheld", "0", "250", "<10", "90"}},
		{"two small groups protect each other", []int{40, 0, 250, 7, 9}, []string{"40", "0", "250", "<10", "<10"}},
		{"two of nine do not: their sum tells", []int{40, 0, 250, 9, 9}, []string{"withheld", "0", "250", "<10", "<10"}},
		{"a group covers where nobody else is", []int{0, 0, 250, 7, 90}, []string{"0", "0", "250", "<10", "withheld"}},
		{"few without a label could be found from the groups", []int{3, 0, 250, 50}, []string{"<10", "0", "250", "withheld"}},
		{"labels not compared cover them rather than a group", []int{3, 120, 250, 50}, []string{"<10", "withheld", "250", "50"}},
		{"few without a label cover a small group", []int{3, 0, 250, 7}, []string{"<10", "0", "250", "<10"}},
		{"an empty cell covers where all else is empty", []int{0, 0, 4, 0}, []string{"<10", "0", "<10", "0"}},
		{"ten is not small", []int{0, 0, 10, 250}, []string{"0", "0", "10", "250"}},
	} {
		if diff := cmp.Diff(c.want, words(guardedSplit(c.cells, 0, 1))); diff != "" {
			t.Errorf("%s:\n%s", c.name, diff)
		}
	}
}

// Whoever knows the total and every shown cell finds at least two values for each cell of
// few: least and most follow from what the other hidden cells can be.
func TestGuardedSplitCannotBeUndone(t *testing.T) {
	t.Parallel()
	r := rand.New(rand.NewPCG(1, 2))
	sizes := []int{0, 0, 1, 2, 8, 9, 9, 10, 11, 40, 300}
	for range 20000 {
		cells := make([]int, 2+r.IntN(4))
		rest := 0
		for i := range cells {
			cells[i] = sizes[r.IntN(len(sizes))]
			rest += cells[i]
		}
		out := guardedSplit(cells, 0)
		hidden, open := 0, false
		for i, c := range out {
			switch c.hiding {
			case visible:
				if c.n != cells[i] || c.n > 0 && c.n < 10 {
					t.Fatalf("%v is shown as %v", cells, words(out))
				}
				rest -= c.n
			case few:
				hidden++
			case complement:
				open = true
			}
		}
		if hidden == len(cells) {
			continue // no other cell could cover them
		}
		if hidden == 0 {
			if open {
				t.Fatalf("%v is shown as %v: nothing asked for that", cells, words(out))
			}
			continue
		}
		most := min(9, rest)
		least := max(0, rest-9*(hidden-1))
		if open {
			least = 0
		}
		if least >= most {
			t.Fatalf("%v, shown as %v, gives a small cell away: it is %d", cells, words(out), most)
		}
	}
}
