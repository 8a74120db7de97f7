package intake

import (
	"fmt"
	"io"
	"strings"
)

// Print writes every kind with the occurrences kept, for a terminal. A message that
// all occurrences of a kind share stands once, before the places.
func (p *Problems) Print(w io.Writer) error {
	var b strings.Builder
	for i := range p.Kinds {
		k := &p.Kinds[i]
		fmt.Fprintf(&b, "%s %s, %d: %s\n", k.Severity, k.Kind, k.Count, k.About)
		if k.sameMessage() {
			fmt.Fprintf(&b, "  %s\n", k.Occurrences[0].Message)
			for _, place := range places(k.Occurrences) {
				fmt.Fprintf(&b, "    %s\n", place)
			}
		} else {
			for _, o := range k.Occurrences {
				fmt.Fprintf(&b, "  %s\n", o)
			}
		}
		if more := k.Count - len(k.Occurrences); more > 0 && len(k.Occurrences) >= maxOccurrences && k.Kind != undeclaredBlanks {
			fmt.Fprintf(&b, "  and %d more\n", more)
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// sameMessage reports whether a kind occurred at several places with one message.
func (k *Kind) sameMessage() bool {
	if len(k.Occurrences) < 2 {
		return false
	}
	for _, o := range k.Occurrences {
		if o.Message != k.Occurrences[0].Message {
			return false
		}
	}
	return true
}

// placesPerLine is how many rows or columns stand on one line.
const placesPerLine = 20

// places names the places of occurrences, those that follow each other in one column
// or in one row together.
func places(all []Occurrence) []string {
	var out []string
	for len(all) > 0 {
		n := 1
		byRow := len(all) > 1 && all[0].sameColumn(all[1])
		for n < min(len(all), placesPerLine) && (byRow && all[0].sameColumn(all[n]) || !byRow && all[0].sameRow(all[n])) {
			n++
		}
		out = append(out, together(all[:n], byRow))
		all = all[n:]
	}
	return out
}

// sameColumn reports whether two occurrences are rows of the same column.
func (o Occurrence) sameColumn(p Occurrence) bool {
	return o.File == p.File && o.Column == p.Column && o.Row > 0 && p.Row > 0
}

// sameRow reports whether two occurrences are columns of the same row, or of the file.
func (o Occurrence) sameRow(p Occurrence) bool {
	return o.File == p.File && o.Row == p.Row && o.Column != "" && p.Column != ""
}

// together names the places of occurrences that share their column or their row.
func together(all []Occurrence, byRow bool) string {
	first := all[0]
	var list []string
	for _, o := range all {
		if byRow {
			list = append(list, fmt.Sprint(o.Row))
		} else {
			list = append(list, o.Column)
		}
	}
	switch {
	case len(all) == 1:
		return first.place()
	case byRow && first.Column == "":
		return fmt.Sprintf("%s, rows %s", first.File, strings.Join(list, ", "))
	case byRow:
		return fmt.Sprintf("%s, column %s, rows %s", first.File, first.Column, strings.Join(list, ", "))
	case first.Row > 0:
		return fmt.Sprintf("%s, row %d, columns %s", first.File, first.Row, strings.Join(list, ", "))
	}
	return fmt.Sprintf("%s, columns %s", first.File, strings.Join(list, ", "))
}
