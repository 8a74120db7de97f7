package reports

// fewestRows is how many rows of a table the last page should hold at least.
const fewestRows = 3

// layRows divides the rows of a table, given by their heights, over pages: room on the
// first page and on each further one, and what must follow the last row on its page. It
// returns the number of rows on each page and the space to leave above and below the text
// of a row, at most tableLine. Where only a few rows would stand on the last page, rows
// are set a little closer if that saves the page; otherwise rows move there from the page
// before.
func layRows(heights []float64, first, next, tail float64) (counts []int, pad float64) {
	pad = tableLine
	counts = fillPages(heights, first, next, tail)
	last := len(counts) - 1
	if last < 1 || counts[last] >= fewestRows {
		return counts, pad
	}
	for _, share := range []float64{0.85, 0.7, 0.55} {
		closer := make([]float64, len(heights))
		for i, h := range heights {
			closer[i] = h - 2*tableLine*(1-share)
		}
		if c := fillPages(closer, first, next, tail); len(c) <= last {
			return c, tableLine * share
		}
	}
	for counts[last] < fewestRows && counts[last-1] > fewestRows {
		counts[last-1]--
		counts[last]++
	}
	return counts, pad
}

// fillPages puts as many rows on every page as fit, at least one.
func fillPages(heights []float64, first, next, tail float64) []int {
	var counts []int
	room, n := first, 0
	for i, h := range heights {
		needed := h
		if i == len(heights)-1 {
			needed += tail
		}
		if n > 0 && needed > room {
			counts = append(counts, n)
			room, n = next, 0
		}
		room -= h
		n++
	}
	return append(counts, n)
}
