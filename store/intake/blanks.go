package intake

import (
	"bytes"
	"fmt"
	"strings"

	"difaudit/dif"
)

// blankCount counts empty cells whose meaning is not known.
type blankCount struct {
	*reading
	total    int
	rows     int   // records looked at
	first    int   // row of the first
	items    []int // per item
	unplaced int   // blanks to be judged by position where no order is known
}

func countBlanks(row []byte) int {
	return bytes.Count(row, []byte{blankCode})
}

// row counts the blanks of record i. Columns that turned out to be no items do not count.
func (b *blankCount) row(i int, row []byte) {
	b.rows++
	if countBlanks(row) == 0 {
		return
	}
	for slot, code := range row {
		if code != blankCode || b.reading.items.items[slot].suspect {
			continue
		}
		if b.total == 0 {
			b.first = int(b.records.rows[i])
		}
		b.total++
		b.items[slot]++
	}
}

// blanksOf counts the blanks of one item, in all and per comparison: reference, focal.
type blanksOf struct {
	slot  int
	total int
	sides [][2]int // of the first comparisons
	more  bool     // there are more comparisons
}

// mostSplits is how many comparisons the blanks of one item are split by.
const mostSplits = 20

// bySide splits the blanks of the given items by the groups of the comparisons. used
// marks the records that count.
func (b *blankCount) bySide(slots []int, used []bool) (items []blanksOf, all [][2]int) {
	comparisons := b.comparisonSides()
	for _, slot := range slots {
		items = append(items, blanksOf{slot, b.items[slot], make([][2]int, min(len(comparisons), mostSplits)), len(comparisons) > mostSplits})
	}
	all = make([][2]int, len(comparisons))
	for i := range b.records.rows {
		row := b.records.answers.Row(i)
		if !used[i] || b.records.formless[i] || countBlanks(row) == 0 {
			continue
		}
		n := 0
		for slot, code := range row {
			if code == blankCode && !b.reading.items.items[slot].suspect {
				n++
			}
		}
		for c := range comparisons {
			side := comparisons[c].of(b.records.labels, int32(i))
			if side == sideNone {
				continue
			}
			all[c][side-sideReference] += n
			if c >= mostSplits {
				continue
			}
			for k := range items {
				if row[items[k].slot] == blankCode {
					items[k].sides[c][side-sideReference]++
				}
			}
		}
	}
	return items, all
}

// report refuses blanks without a declared meaning, with counts and choices.
func (b *blankCount) report(used []bool) {
	name := b.responses.name
	if b.unplaced > 0 {
		b.problems.add(positionUnknown, name, 0, "",
			"%s to be judged by position, and a long file without items or forms file has no order of items; give one of the two files, or choose --empty not_presented or --empty omitted", are(b.unplaced, "empty cell"))
	}
	if b.total == 0 {
		return
	}
	k := b.problems.kind(undeclaredBlanks)
	k.Count = b.total
	say := func(row int, column, format string, args ...any) {
		k.Occurrences = append(k.Occurrences, Occurrence{File: name, Row: row, Column: column, Message: fmt.Sprintf(format, args...)})
	}
	var slots []int
	for slot, n := range b.items {
		if n > 0 {
			slots = append(slots, slot)
		}
	}
	say(b.first, "", "from this row on, %s of %s %s empty and the plan does not say what that means; choose one of the following",
		plural(b.total, "item cell"), plural(len(slots), "item"), either(b.total, "is", "are"))
	say(0, "", "--empty %s: the item was not shown to the candidate; the candidate is left out of the item and matched with those shown the same items", dif.EmptyNotPresented)
	say(0, "", "--empty %s: the candidate saw the item and left it blank; it counts as wrong", dif.EmptyOmitted)
	say(0, "", "--empty %s: a blank with a later answer counts as omitted; blanks at the end count as not reached, which is wrong in the matching score and leaves the candidate out of the item", dif.EmptyByPosition)
	listed, all := b.bySide(slots[:min(len(slots), maxOccurrences)], used)
	for c, p := range b.plan.Comparisons {
		say(0, "", "comparison %d (%s): %s of reference %s, %d of focal %s",
			c+1, shown(p.Grouping), plural(all[c][0], "empty cell"), quoted(p.Reference), all[c][1], quoted(p.Focal))
	}
	for _, it := range listed {
		say(0, shown(b.reading.items.items[it.slot].ID), "%s of %s; %s",
			plural(it.total, "empty cell"), plural(b.rows, "candidate"), it.split())
	}
	if more := len(slots) - len(listed); more > 0 {
		say(0, "", "%s with empty cells", plural(more, "more item"))
	}
}

// split says how the blanks of an item fall on the groups of the comparisons.
func (n *blanksOf) split() string {
	var parts []string
	for c, sides := range n.sides {
		parts = append(parts, fmt.Sprintf("comparison %d: reference %d, focal %d", c+1, sides[0], sides[1]))
	}
	if n.more {
		parts = append(parts, "...")
	}
	return strings.Join(parts, "; ")
}
