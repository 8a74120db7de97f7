package intake

import (
	"bytes"
	"fmt"

	"difaudit/dif"
)

// blankCount counts empty cells whose meaning is not known, per item and per group
// of the comparisons.
type blankCount struct {
	*reading
	total    int
	first    int // row of the first
	items    []int
	groups   [][2]int // per comparison: reference, focal
	unplaced int      // blanks to be judged by position where no order is known
	sides    []comparisonSides
}

func countBlanks(row []byte) int {
	return bytes.Count(row, []byte{blankCode})
}

// row counts the blanks of record i.
func (b *blankCount) row(i int, row []byte) {
	n := countBlanks(row)
	if n == 0 {
		return
	}
	if b.total == 0 {
		b.first = int(b.records.rows[i])
		b.sides = b.comparisonSides()
	}
	b.total += n
	for slot, code := range row {
		if code == blankCode {
			b.items[slot]++
		}
	}
	for c := range b.sides {
		switch b.sides[c].of(b.records.labels, int32(i)) {
		case sideReference:
			b.groups[c][0] += n
		case sideFocal:
			b.groups[c][1] += n
		}
	}
}

// report refuses blanks without a declared meaning, with counts and choices.
func (b *blankCount) report() {
	name := b.responses.name
	if b.unplaced > 0 {
		b.problems.add(positionUnknown, name, 0, "",
			"%d empty cells are to be judged by position, and a long file without items or forms file has no order of items; give one of the two files, or choose --empty not_presented or --empty omitted", b.unplaced)
	}
	if b.total == 0 {
		return
	}
	k := b.problems.kind(undeclaredBlanks)
	k.Count = b.total
	say := func(row int, column, format string, args ...any) {
		k.Occurrences = append(k.Occurrences, Occurrence{File: name, Row: row, Column: column, Message: fmt.Sprintf(format, args...)})
	}
	concerned := 0
	for _, n := range b.items {
		if n > 0 {
			concerned++
		}
	}
	say(b.first, "", "from this row on, %d item cells of %d items are empty and the plan does not say what that means; choose one of the following", b.total, concerned)
	say(0, "", "--empty %s: the item was not shown to the candidate; the candidate is left out of the item and matched with those shown the same items", dif.EmptyNotPresented)
	say(0, "", "--empty %s: the candidate saw the item and left it blank; it counts as wrong", dif.EmptyOmitted)
	say(0, "", "--empty %s: a blank with a later answer counts as omitted; blanks at the end count as not reached, which is wrong in the matching score and leaves the candidate out of the item", dif.EmptyByPosition)
	listed := 0
	for slot, n := range b.items {
		if n > 0 && listed < maxOccurrences {
			say(0, shown(b.reading.items.items[slot].ID), "%d empty cells of %d candidates", n, len(b.records.rows))
			listed++
		}
	}
	for c, p := range b.plan.Comparisons {
		say(0, "", "comparison %d (%s): %d empty cells of reference %s, %d of focal %s",
			c+1, shown(p.Grouping), b.groups[c][0], quoted(p.Reference), b.groups[c][1], quoted(p.Focal))
	}
}
