package reports

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

// guardedSplit hides the small cells of a total that is itself shown. notStated is the
// place of the cell of those without a label, -1 where there is none. Where exactly one
// cell is hidden, and it is a label's, the smallest other cell that holds anybody is
// hidden too. A small cell of those without a label asks for no such protection: nobody's
// group can be told from it.
func guardedSplit(cells []int, notStated int) []count {
	out := make([]count, len(cells))
	hidden, labels, next := 0, 0, -1
	for i, n := range cells {
		out[i] = guarded(n)
		switch {
		case out[i].hiding != visible:
			hidden++
			if i != notStated {
				labels++
			}
		case n > 0 && (next < 0 || n < cells[next]):
			next = i
		}
	}
	if hidden == 1 && labels == 1 && next >= 0 {
		out[next] = count{hiding: complement}
	}
	return out
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
