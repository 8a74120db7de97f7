package intake

import (
	"bytes"
	"cmp"
	"context"
	"slices"
	"strings"
	"unicode/utf8"

	"difaudit/dif"
)

// long reads a file with one row per candidate and item.
type long struct {
	*reading
	at     special
	groups []int // per used grouping: its column, -1 where absent
	forms  formReader
	index  *index
	pairs  pairs
	last   int // record of the row before, -1 with none
}

// readLong reads the rows.
func (r *reading) readLong(ctx context.Context) error {
	l := &long{reading: r, forms: formReader{r.forms, map[string]int{}}, index: newIndex(), last: -1}
	t := r.responses
	ok := t.require(candidateColumn)
	l.at = r.specialColumns()
	l.groups = r.groupColumns()
	for _, name := range t.header {
		if ok && r.columnUse(name) == useUndeclared {
			r.problems.add(undeclaredColumn, t.name, t.row, name,
				"a long response file has the columns candidate_id, item_id, response and perhaps form and attempt; declare this one with --ignore, and put groupings into the candidates file")
		}
	}
	for i, it := range r.items.items {
		it.index = i
	}
	if !ok {
		return nil
	}
	r.newRecords(l.at, l.groups)
	r.records.ids = l.index.ids
	for {
		record, err := t.next()
		if err != nil {
			return err
		}
		if record == nil {
			break
		}
		if err := r.pause(ctx); err != nil {
			return err
		}
		if !l.row(record) {
			r.problems.add(tooLarge, t.name, t.row, "", "candidates times items come to more than %d answers, which is the limit; check that item_id holds items", maxCells)
			t.cut = true
			return nil
		}
	}
	l.finish()
	return nil
}

// row takes over one row; false where there is no room.
func (l *long) row(record []string) bool {
	t, rec := l.responses, l.records
	l.id = append(l.id[:0], strings.TrimSpace(record[l.at.id])...)
	if !checkID(l.id, t, l.problems) {
		return true
	}
	attempt := int32(0)
	if l.at.attempt >= 0 {
		attempt = parseAttempt(record[l.at.attempt], t, l.problems)
	}
	i := l.last
	if i < 0 || l.index.attempts[i] != attempt || !bytes.Equal(l.index.ids.At(i), l.id) {
		var isNew bool
		if i, isNew = l.index.add(l.id, attempt); isNew {
			l.begin(attempt)
		}
		l.last = i
	}
	form, formKnown := 0, true
	if l.at.form >= 0 {
		if form, formKnown = l.forms.read(record[l.at.form], t, l.problems); !formKnown {
			rec.formless[i] = true
		} else if rec.rows[i] == int32(t.row) {
			rec.form[i] = uint16(form)
		} else if rec.form[i] != uint16(form) && !rec.formless[i] {
			l.problems.add(formDiffers, t.name, t.row, "form", "row %d gives this candidate another form; one attempt has one form: correct it, or number the attempts in a column attempt", rec.rows[i])
			return true
		}
	}
	for g, field := range l.groups {
		if field >= 0 {
			l.label(g, i, record[field])
		}
	}
	it, offForm := l.find(strings.TrimSpace(record[l.at.item]), form, formKnown && !rec.formless[i])
	cell := record[l.at.response]
	switch {
	case it == nil:
		l.lost = true
		return true
	case offForm:
		l.offForm(strings.TrimSpace(cell), it.ID)
		return true
	}
	it.given = true
	code, why := it.enc.code(cell, t.row)
	if why != accepted {
		refused(why, it, cell, "response", t, l.problems)
	}
	before, twice, full := l.pairs.put(i, it.index, len(l.items.items), code)
	switch {
	case full:
		return false
	case twice && before == code:
		l.problems.add(duplicateResponse, t.name, t.row, "response", "an earlier row gives the same answer of this candidate to item %s; this row is not used", shown(it.ID))
	case twice:
		l.problems.add(conflictingResponse, t.name, t.row, "response", "an earlier row gives another answer of this candidate to item %s; keep one of them, or number the attempts in a column attempt", shown(it.ID))
	}
	return true
}

// begin appends a record.
func (l *long) begin(attempt int32) {
	rec := l.records
	rec.rows = append(rec.rows, int32(l.responses.row))
	if rec.form != nil {
		rec.form = append(rec.form, 0)
	}
	if rec.attempt != nil {
		rec.attempt = append(rec.attempt, attempt)
	}
	for g, field := range l.groups {
		if field >= 0 {
			rec.labels[g] = append(rec.labels[g], 0)
		}
	}
}

// label combines the label of one row with those of earlier rows of the record.
func (l *long) label(g, i int, cell string) {
	grouping := l.groupings[g]
	code := grouping.read(cell, l.responses, l.problems)
	before := l.records.labels[g][i]
	l.records.labels[g][i] = combine(before, code)
	if l.records.labels[g][i] == codeSeveral && before != codeSeveral && code != codeSeveral && grouping.several == codeSeveral {
		l.problems.add(severalLabels, l.responses.name, l.responses.row, grouping.name,
			"an earlier row gives the same candidate another label; correct one row, or declare in the plan what several labels become (groupings.%s.several: not_stated, or a label)", grouping.name)
	}
}

// find returns the item a row names, nil where it cannot be told, and whether the
// candidate's form lacks it.
func (l *long) find(id string, form int, formKnown bool) (it *item, offForm bool) {
	t := l.responses
	versions := l.items.byID[id]
	switch {
	case id == "":
		l.problems.add(badValue, t.name, t.row, "item_id", "the row has no item identifier; give one or remove the row")
		return nil, false
	case len(id) > maxNameBytes:
		l.problems.add(badValue, t.name, t.row, "item_id", "the identifier is longer than %s; shorten it, or check the quotation marks of this row", nameLimit)
		return nil, false
	case versions == nil && l.items.declared:
		l.problems.add(unknownItem, t.name, t.row, "item_id", "item %s is not in the items file; add it there or correct the identifier", shown(id))
		return nil, false
	case versions == nil && !utf8.ValidString(id):
		l.problems.add(badEncoding, t.name, t.row, "item_id", "the identifier is not UTF-8; save the file as UTF-8")
		return nil, false
	case versions == nil && len(l.items.items) == maxColumns:
		l.problems.add(tooLarge, t.name, t.row, "item_id", "the file names more than %d items, which is the limit; check that item_id holds items", maxColumns)
		return nil, false
	case versions == nil:
		it := l.newItem(id)
		it.prepare(l.missing, false, l.problems)
		it.index = len(l.items.items)
		l.items.add(it)
		versions = l.items.byID[it.ID]
	}
	if l.forms.set.declared && (!formKnown || l.forms.set.broken) {
		return nil, false
	}
	if l.forms.set.declared {
		if entry := l.forms.set.forms[form].byItem[id]; entry != nil {
			return entry.item, false
		}
		return versions[0], true
	}
	if len(versions) > 1 {
		versions[0].given = true
		l.problems.add(versionAmbiguous, t.name, t.row, "item_id", "the items file has %d versions of item %s; give a forms file that says which form has which version", len(versions), shown(id))
		return nil, false
	}
	return versions[0], false
}

// finish puts items and answers into their final order. An answer that never came
// is an empty cell, as in a wide file, if nobody gave one to the item.
func (l *long) finish() {
	if !l.items.declared {
		slices.SortFunc(l.items.items, func(a, b *item) int {
			return cmp.Or(cmp.Compare(a.ID, b.ID), cmp.Compare(a.Version, b.Version))
		})
	}
	place := make([]int, len(l.items.items))
	for i, it := range l.items.items {
		place[it.index] = i
		it.index = i
		if versions := l.items.byID[it.ID]; len(versions) > 1 && it == versions[0] && !it.given && !l.forms.set.declared {
			l.problems.add(versionAmbiguous, it.file, it.row, "version", "no row of the response file names item %s, which has %d versions; give a forms file that says which form has which version", shown(it.ID), len(versions))
		}
	}
	rec := l.records
	rec.answers = dif.NewAnswers(len(l.items.items))
	for i := range rec.rows {
		row := rec.answers.Append()
		l.pairs.fill(i, row, place)
		l.pairs.release(i)
	}
	if len(rec.rows) > 0 && len(l.items.items) == 0 {
		l.problems.add(noItems, l.responses.name, 0, "item_id", "no row names an item that can be used")
	}
}
