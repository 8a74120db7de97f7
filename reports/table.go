package reports

import (
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"

	"difaudit/dif"
)

const (
	terminalWidth       = 100 // columns that sentences are wrapped to, and lines of items kept to where names allow
	longestTerminalName = 40  // columns of an item id in the table
	leastTerminalName   = 16
)

// terminalColumn is a column of the plain-text table.
type terminalColumn struct {
	head  string
	right bool
	text  func(f *exposedFinding) string
}

// WriteTable writes the findings for a terminal: first which candidates were lost, a line
// each; then for every comparison a heading, a line for every item, and the counts beside
// those expected by chance. Sentences are wrapped to 100 columns. A letter in
// parentheses is provisional and stands before the reason for no verdict. Counts below
// ten and the results that rest on them are withheld.
func WriteTable(w io.Writer, e *dif.Evidence) error {
	if e == nil {
		return errors.New("write table: there is no evidence")
	}
	x := expose(e)
	var b strings.Builder
	for _, sentence := range x.lost {
		b.WriteString(terminalText(sentence) + "\n")
	}
	if len(x.lost) > 0 {
		b.WriteByte('\n')
	}
	for i := range x.comparisons {
		if i > 0 {
			b.WriteByte('\n')
		}
		x.comparisons[i].terminal(&b, x.plan)
	}
	if _, err := io.WriteString(w, b.String()); err != nil {
		return fmt.Errorf("write table: %w", err)
	}
	return nil
}

func (c *exposedComparison) terminal(b *strings.Builder, p dif.Plan) {
	writeWrapped(b, "", fmt.Sprintf("%s: %s (focal, %s) against %s (reference, %s)",
		c.Grouping, c.Focal, c.nFocal, c.Reference, c.nReference))
	if c.withheld {
		writeWrapped(b, "  ", "A group holds fewer than 10 candidates: no statistic is shown.")
	}
	for _, warning := range c.Warnings {
		writeWrapped(b, "  ", "note: "+warningMessage(warning))
	}
	notes := c.notes()
	columns := terminalColumns(p, notes)
	lines := make([][]string, len(c.findings)+1)
	for _, column := range columns {
		lines[0] = append(lines[0], column.head)
		for k := range c.findings {
			lines[k+1] = append(lines[k+1], column.text(&c.findings[k]))
		}
	}
	shortenNames(columns, lines)
	writeAligned(b, columns, lines)
	for _, n := range notes {
		if n.mark != "" {
			writeWrapped(b, "  ", n.mark+": "+n.sentence)
		}
	}
	writeWrapped(b, "  ", c.tally().terminal())
	if chance := c.chanceText(p.Criteria.ClassAlpha); chance != "" {
		writeWrapped(b, "  ", chance)
	}
}

// writeWrapped writes a sentence in as many lines as it needs, those after the first two
// columns further in.
func writeWrapped(b *strings.Builder, indent, sentence string) {
	measure := func(s string) float64 { return float64(displayWidth(s)) }
	for i, line := range wrapText(terminalText(sentence), float64(terminalWidth-len(indent)-2), measure) {
		if i > 0 {
			b.WriteString("  ")
		}
		b.WriteString(indent + line + "\n")
	}
}

func terminalColumns(p dif.Plan, notes []note) []terminalColumn {
	columns := []terminalColumn{
		{"item", false, func(f *exposedFinding) string {
			return terminalText(f.name())
		}},
		{"n_R", true, func(f *exposedFinding) string { return f.nReference.record() }},
		{"n_F", true, func(f *exposedFinding) string { return f.nFocal.record() }},
		{"p_R", true, func(f *exposedFinding) string { return terminalNumber(fixed(f.PReference, 2)) }},
		{"p_F", true, func(f *exposedFinding) string { return terminalNumber(fixed(f.PFocal, 2)) }},
	}
	heads := map[string]string{"D-DIF": "D-DIF", "SE": "SE", "χ²": "chi2", "p": "p", "q": "q", "P-DIF": "P-DIF"}
	for _, m := range mainColumns(p.Criteria) {
		head, ok := heads[m.column.head]
		if !ok || !slices.Contains(p.Methods, m.method) {
			continue
		}
		columns = append(columns, terminalColumn{head, true, func(f *exposedFinding) string { return terminalNumber(m.text(f, p.Criteria)) }})
	}
	return append(columns,
		terminalColumn{"class", false, (*exposedFinding).verdict},
		terminalColumn{"", false, func(f *exposedFinding) string { return f.marks(notes) }})
}

// terminalNumber uses plain ASCII where a value does not exist.
func terminalNumber(s string) string {
	if s == missing {
		return "-"
	}
	return s
}

// shortenNames cuts the names of items, the first column, so that the lines keep to the
// width of a terminal as far as the other columns leave room.
func shortenNames(columns []terminalColumn, lines [][]string) {
	others := 0
	for i := range columns[1:] {
		widest := 0
		for _, line := range lines {
			widest = max(widest, displayWidth(line[i+1]))
		}
		others += widest + gapBefore(columns, i+1)
	}
	room := max(leastTerminalName, min(longestTerminalName, terminalWidth-gapBefore(columns, 0)-others))
	for _, line := range lines[1:] {
		line[0] = shortenMiddle(line[0], float64(room), func(s string) float64 { return float64(displayWidth(s)) })
	}
}

// gapBefore is the space before a column: numbers stand close together.
func gapBefore(columns []terminalColumn, i int) int {
	if i > 1 && columns[i].right || columns[i].head == "" {
		return 1
	}
	return 2
}

// writeAligned writes the lines in columns as wide as their widest cell.
func writeAligned(b *strings.Builder, columns []terminalColumn, lines [][]string) {
	widths := make([]int, len(columns))
	for _, line := range lines {
		for i, cell := range line {
			widths[i] = max(widths[i], displayWidth(cell))
		}
	}
	for _, line := range lines {
		var out strings.Builder
		for i, cell := range line {
			pad := strings.Repeat(" ", widths[i]-displayWidth(cell))
			out.WriteString(strings.Repeat(" ", gapBefore(columns, i)))
			if columns[i].right {
				out.WriteString(pad + cell)
			} else {
				out.WriteString(cell + pad)
			}
		}
		b.WriteString(strings.TrimRight(out.String(), " ") + "\n")
	}
}

// terminal lists the counts in one line.
func (t tally) terminal() string {
	text := fmt.Sprintf("C- %d, C+ %d, B- %d, B+ %d, A %d", t.cMinus, t.cPlus, t.bMinus, t.bPlus, t.a+t.aOpen)
	if t.aOpen > 0 {
		text += fmt.Sprintf(" (on %d of them a large difference is not excluded)", t.aOpen)
	}
	text += fmt.Sprintf(", no verdict %d", t.noVerdict)
	if reasons := t.reasonsText(); reasons != "" {
		text += ": " + reasons
	}
	return text + "."
}
