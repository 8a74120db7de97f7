package reports

import "slices"

// smallest is the least number of candidates of a group that a report shows anything of.
const smallest = 10

// count is a number of candidates that may have to stay unseen.
type count struct {
	n      int // 0 when it is not shown
	hiding hiding
}

type hiding int

const (
	visible    hiding = iota
	few               // fewer than ten
	complement        // withheld so that another cell cannot be found by subtraction
)

// guarded hides a count of one to nine. Nobody (zero) needs no protection.
func guarded(n int) count {
	if n > 0 && n < smallest {
		return count{hiding: few}
	}
	return count{n: n}
}

// concealed hides a count whatever it is; zero is told as few, which it may be.
func concealed(n int) count {
	if n < smallest {
		return count{hiding: few}
	}
	return count{hiding: complement}
}

// guardedSplit hides the small cells of a total that is itself shown. Where the total
// would still give a hidden cell away, one more is hidden: the smallest other cell that
// holds anybody, and where all others are empty an empty one, as if it held few. spare
// lists the cells that are no compared group (those without a label, labels not
// compared); when only such cells are small, another spare cell is hidden rather than a
// group.
//
// Read by somebody who knows the rule, a cell of few stands for 0 to 9 candidates. Two or
// more of them cover each other unless each holds nine.
func guardedSplit(cells []int, spare ...int) []count {
	out := make([]count, len(cells))
	hidden, sum, groups := 0, 0, 0
	for i, n := range cells {
		out[i] = guarded(n)
		if out[i].hiding == visible {
			continue
		}
		hidden++
		sum += n
		if !slices.Contains(spare, i) {
			groups++
		}
	}
	if hidden == 0 || hidden > 1 && sum < hidden*(smallest-1) {
		return out
	}
	next := -1
	if groups == 0 {
		next = smallestShown(out, func(i int) bool { return slices.Contains(spare, i) })
	}
	if next < 0 {
		next = smallestShown(out, func(int) bool { return true })
	}
	if next >= 0 {
		out[next] = count{hiding: complement}
	} else if empty := slices.Index(out, count{}); empty >= 0 {
		out[empty] = count{hiding: few}
	}
	return out
}

// smallestShown returns the place of the smallest shown cell that holds anybody, -1
// where there is none.
func smallestShown(cells []count, allowed func(i int) bool) int {
	at := -1
	for i, c := range cells {
		if c.hiding == visible && c.n > 0 && allowed(i) && (at < 0 || c.n < cells[at].n) {
			at = i
		}
	}
	return at
}

// String prints the count for running text.
func (c count) String() string {
	switch c.hiding {
	case few:
		return "fewer than 10"
	case complement:
		return "withheld"
	}
	return whole(c.n)
}

// cell prints the count for a narrow table cell.
func (c count) cell() string {
	if c.hiding == few {
		return "<10"
	}
	return c.String()
}
