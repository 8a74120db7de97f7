package reports

import "strings"

// tableColumn is a column of a PDF table. A column without a width shares what is left.
type tableColumn struct {
	head  string // lines separated by \n
	width float64
	align alignment
}

type alignment int

const (
	alignLeft alignment = iota
	alignRight
	alignCentre
)

// tableCell is one cell; text wraps to as many lines as it needs.
type tableCell struct {
	text string
	bold bool
	dim  bool
}

func cells(texts ...string) []tableCell {
	out := make([]tableCell, len(texts))
	for i, t := range texts {
		out[i].text = t
	}
	return out
}

const (
	tablePad     = 1.5 // left and right of a cell
	tableLine    = 1.0 // above and below a row
	longestShare = 0.6 // of a page that one row may fill; longer cells are set smaller
)

// table writes rows under a head that is repeated on every page.
func (d *document) table(columns []tableColumn, rows [][]tableCell, size float64) {
	d.tableWithNote(columns, rows, size, "")
}

// tableWithNote writes a table and a note that stands on the page of its last rows.
func (d *document) tableWithNote(columns []tableColumn, rows [][]tableCell, size float64, note string) {
	columns = d.fit(columns)
	s := style{size: size, ink: ink}
	set := make([]setRow, len(rows))
	heights := make([]float64, len(rows))
	for i, row := range rows {
		set[i] = d.setRow(columns, row, s)
		heights[i] = set[i].height
	}
	tail := 2.0
	if note != "" {
		tail += float64(len(d.wrap(note, caption, d.width()))) * caption.lineHeight()
	}
	if len(rows) > 0 {
		head := d.headHeight(columns, s)
		d.need(head + heights[0] + 2)
		counts, pad := layRows(heights, d.room()-head, d.floor()-marginTop-head, tail)
		next := 0
		for p, n := range counts {
			if p > 0 {
				d.addPage(d.landscape)
			}
			d.tableHead(columns, s)
			for i := next; i < next+n; i++ {
				d.tableRow(columns, rows[i], set[i], pad)
				d.y += heights[i] - 2*(tableLine-pad)
				d.line(d.left(), d.y, d.right(), d.y, stroke{hairline, 0.12, false})
			}
			next += n
		}
	}
	d.space(2)
	if note != "" {
		d.paragraph(note, caption)
	}
}

// fit gives the columns without a width what the others leave.
func (d *document) fit(columns []tableColumn) []tableColumn {
	out := append([]tableColumn{}, columns...)
	left, open := d.width(), 0
	for _, c := range out {
		left -= c.width
		if c.width == 0 {
			open++
		}
	}
	for i := range out {
		if out[i].width == 0 {
			out[i].width = max(left/float64(open), 16)
		}
	}
	return out
}

func (c tableCell) style(s style) style {
	s.bold = c.bold
	if c.dim {
		s.ink = quiet
	}
	return s
}

// setRow is a row broken into lines: those of each cell, the style they are set in, and
// the height of the row.
type setRow struct {
	lines  [][]string
	style  style
	height float64
}

// setRow breaks the cells of a row into lines. A row that would fill most of a page is
// set smaller, down to a quarter of the size.
func (d *document) setRow(columns []tableColumn, row []tableCell, s style) setRow {
	for {
		most := 1
		lines := make([][]string, len(row))
		for i, c := range row {
			lines[i] = d.wrap(c.text, c.style(s), columns[i].width-2*tablePad)
			most = max(most, len(lines[i]))
		}
		height := float64(most)*s.lineHeight()*0.92 + 2*tableLine
		if height <= longestShare*(d.floor()-marginTop) || s.size < 2 {
			return setRow{lines, s, height}
		}
		s.size *= 0.8
	}
}

// tableRow writes a row with the given space above its lines.
func (d *document) tableRow(columns []tableColumn, row []tableCell, set setRow, pad float64) {
	x := d.left()
	for i, c := range row {
		y := d.y + pad + set.style.size*0.3528
		for _, line := range set.lines[i] {
			d.align(columns[i], x, y, line, c.style(set.style))
			y += set.style.lineHeight() * 0.92
		}
		x += columns[i].width
	}
}

func (d *document) align(c tableColumn, x, y float64, t string, s style) {
	switch c.align {
	case alignRight:
		d.putRight(x+c.width-tablePad, y, t, s)
	case alignCentre:
		d.putCentre(x+c.width/2, y, t, s)
	default:
		d.put(x+tablePad, y, t, s)
	}
}

func (d *document) headLines(c tableColumn, s style) []string {
	var lines []string
	for _, part := range strings.Split(c.head, "\n") {
		lines = append(lines, d.wrap(part, s, c.width-2*tablePad)...)
	}
	return lines
}

func (d *document) headHeight(columns []tableColumn, s style) float64 {
	s.bold = true
	most := 1
	for _, c := range columns {
		most = max(most, len(d.headLines(c, s)))
	}
	return float64(most)*s.lineHeight()*0.92 + 2*tableLine
}

// tableHead writes the column heads, set on the line below them.
func (d *document) tableHead(columns []tableColumn, s style) {
	height := d.headHeight(columns, s)
	s.bold = true
	d.box(d.left(), d.y, d.width(), height, pale)
	x := d.left()
	for _, c := range columns {
		lines := d.headLines(c, s)
		y := d.y + height - tableLine - s.size*0.08 - float64(len(lines)-1)*s.lineHeight()*0.92
		for _, line := range lines {
			d.align(c, x, y-0.3, line, s)
			y += s.lineHeight() * 0.92
		}
		x += c.width
	}
	d.y += height
	d.line(d.left(), d.y, d.right(), d.y, stroke{quiet, 0.3, false})
}
