package reports

import (
	"math"
	"strconv"
)

// intervalRow is one item of an interval plot.
type intervalRow struct {
	number  int
	item    string
	delta   *float64
	low     *float64
	high    *float64
	class   string // letter, also a provisional one; empty without one
	verdict string // printed at the right edge
	reason  string // printed in place of a mark
}

const (
	intervalRowHeight = 4.75
	intervalHead      = 10.5
	intervalFoot      = 9.0
	intervalVerdict   = 37.0 // width of the last column
	intervalTwoLines  = 5.4  // points, in two lines
	intervalSmallest  = 3.0
	farthestDelta     = 6.0
)

// intervalPlot draws D-DIF with its 95 % interval, a row for every item, over as many
// pages as needed. Harder for the focal group is left. The shape says how large the
// difference is and where it points: dot, hollow triangle (B), filled triangle (C).
func (d *document) intervalPlot(rows []intervalRow) {
	reach := intervalReach(rows)
	for len(rows) > 0 {
		if d.room() < intervalHead+intervalFoot+min(5, float64(len(rows)))*intervalRowHeight {
			d.addPage(d.landscape)
		}
		n := min(len(rows), max(1, int((d.room()-intervalHead-intervalFoot)/intervalRowHeight)))
		d.intervalPage(rows[:n], reach)
		rows = rows[n:]
	}
	d.space(2)
}

// intervalReach returns the end of the axis: all of every interval up to 6.
func intervalReach(rows []intervalRow) float64 {
	reach := 2.5
	for _, r := range rows {
		for _, v := range []*float64{r.delta, r.low, r.high} {
			if v != nil {
				reach = max(reach, math.Ceil(math.Abs(*v)*2)/2)
			}
		}
	}
	return min(reach, farthestDelta)
}

func (d *document) intervalPage(rows []intervalRow, reach float64) {
	label := style{size: 7, ink: ink}
	tick := style{size: 6.5, ink: quiet}
	numberEdge := d.left() + 8
	axis := scale{-reach, reach, d.left() + 48, d.right() - intervalVerdict - 18}
	top := d.y + intervalHead
	bottom := top + float64(len(rows))*intervalRowHeight

	d.put(d.left()+10, top-2, "Item", style{true, 7, ink})
	d.putRight(numberEdge, top-2, "No.", style{true, 7, ink})
	d.putRight(d.right()-intervalVerdict-3, top-2, "D-DIF", style{true, 7, ink})
	d.put(d.right()-intervalVerdict, top-2, "Class", style{true, 7, ink})
	d.put(axis.a, d.y+3, "< harder for the focal group", tick)
	d.putRight(axis.b, d.y+3, "easier for the focal group >", tick)

	band, edge := colour{232, 234, 237}, colour{244, 245, 246}
	d.box(axis.a, top, axis.at(-limitC)-axis.a, bottom-top, band)
	d.box(axis.at(limitC), top, axis.b-axis.at(limitC), bottom-top, band)
	d.box(axis.at(-limitC), top, axis.at(-limitB)-axis.at(-limitC), bottom-top, edge)
	d.box(axis.at(limitB), top, axis.at(limitC)-axis.at(limitB), bottom-top, edge)
	for i := range rows {
		y := top + float64(i)*intervalRowHeight
		d.line(d.left(), y, d.right(), y, stroke{hairline, 0.1, false})
	}
	for _, v := range []float64{-limitC, -limitB, limitB, limitC} {
		d.line(axis.at(v), top, axis.at(v), bottom, stroke{colour{160, 164, 170}, 0.15, true})
	}
	d.line(axis.at(0), top, axis.at(0), bottom, stroke{quiet, 0.3, false})
	d.intervalTicks(axis, top-2, bottom+3, tick)
	for i, r := range rows {
		d.intervalRow(r, axis, top+(float64(i)+0.5)*intervalRowHeight, numberEdge, label)
	}
	d.line(axis.a, bottom, axis.b, bottom, stroke{quiet, 0.3, false})
	d.y = bottom + intervalFoot - 2
}

// intervalTicks labels whole values, and the limits where there is room for them.
func (d *document) intervalTicks(axis scale, above, below float64, s style) {
	for v := -math.Floor(axis.high); v <= axis.high; v++ {
		t := strconv.FormatFloat(v, 'f', -1, 64)
		d.putCentre(axis.at(v), above, t, s)
		d.putCentre(axis.at(v), below, t, s)
	}
	if axis.at(limitC)-axis.at(limitB) > 6 {
		for _, v := range []float64{-limitC, limitC} {
			t := strconv.FormatFloat(v, 'f', 1, 64)
			d.putCentre(axis.at(v), above, t, s)
			d.putCentre(axis.at(v), below, t, s)
		}
	}
}

func (d *document) intervalRow(r intervalRow, axis scale, y, numberEdge float64, s style) {
	baseline := y + 0.9
	dim := s
	dim.ink = quiet
	d.putRight(numberEdge, baseline, strconv.Itoa(r.number), dim)
	d.put(d.left()+10, baseline, shortenMiddle(d.text.clean(r.item), axis.a-d.left()-12, d.measure(s)), s)
	verdict := s
	verdict.bold = r.class != "" && r.class == r.verdict && r.class[0] != 'A'
	lines, verdict := d.uncut(r.verdict, verdict, intervalVerdict)
	d.stack(lines, verdict, y, func(base float64, line string) { d.put(d.right()-intervalVerdict, base, line, verdict) })
	d.putRight(d.right()-intervalVerdict-3, baseline, dDIF(r.delta), s)
	if r.delta == nil {
		lines, dim := d.uncut(r.reason, dim, axis.b-axis.a-4)
		w := 0.0
		for _, line := range lines {
			w = max(w, d.widthOf(line, dim))
		}
		middle := (axis.a + axis.b) / 2
		d.box(middle-w/2-1, y-intervalRowHeight/2+0.2, w+2, intervalRowHeight-0.4, colour{255, 255, 255})
		d.stack(lines, dim, y, func(base float64, line string) { d.putCentre(middle, base, line, dim) })
		return
	}
	provisional := r.class == "" || r.verdict != r.class
	if r.low != nil && r.high != nil {
		d.interval(axis, *r.low, *r.high, y, provisional)
	}
	d.intervalMark(r, axis, y)
}

// uncut breaks text into one line, or two of smaller type, so that nothing of it is cut
// in a row of the plot. Text too long even for that is set smaller still.
func (d *document) uncut(t string, s style, width float64) ([]string, style) {
	for _, size := range []float64{s.size, s.size * 0.93, s.size * 0.86} {
		s.size = size
		if lines := d.wrap(t, s, width); len(lines) == 1 {
			return lines, s
		}
	}
	for s.size = intervalTwoLines; ; s.size *= 0.9 {
		lines := d.wrap(t, s, width)
		if len(lines) <= 2 {
			return lines, s
		}
		if s.size < intervalSmallest {
			last := shorten(lines[1]+" "+lines[2], width, d.measure(s))
			return []string{lines[0], last}, s
		}
	}
}

// stack writes one or two lines around the middle of a row.
func (d *document) stack(lines []string, s style, middle float64, write func(baseline float64, line string)) {
	height := s.size * 0.3528
	pitch := height * 1.1
	for i, line := range lines {
		write(middle+0.36*height+(float64(i)-float64(len(lines)-1)/2)*pitch, line)
	}
}

// interval draws the line, with an arrow where it leaves the axis.
func (d *document) interval(axis scale, low, high, y float64, provisional bool) {
	s := stroke{ink, 0.35, provisional}
	from, to := max(low, axis.low), min(high, axis.high)
	if from < to {
		d.line(axis.at(from), y, axis.at(to), y, s)
	}
	s.dashed = false
	for _, end := range []struct{ value, limit, direction float64 }{{low, axis.low, -1}, {high, axis.high, 1}} {
		if beyond := (end.value - end.limit) * end.direction; beyond > 0 {
			x := axis.at(end.limit)
			d.line(x, y, x-end.direction*1.5, y-0.9, s)
			d.line(x, y, x-end.direction*1.5, y+0.9, s)
		} else {
			x := axis.at(end.value)
			d.line(x, y-0.8, x, y+0.8, s)
		}
	}
}

func (d *document) intervalMark(r intervalRow, axis scale, y float64) {
	x := axis.at(max(axis.low, min(axis.high, *r.delta)))
	direction := 1.0
	if *r.delta < 0 {
		direction = -1
	}
	edge := stroke{ink, 0.3, false}
	switch {
	case r.class == "" || r.class[0] == 'A':
		d.disc(x, y, 0.85, edge, &ink)
	case r.class[0] == 'B':
		triangle(d, x, y, 1.35, direction, edge, nil)
	default:
		triangle(d, x, y, 1.35, direction, edge, &ink)
	}
}
