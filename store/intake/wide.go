package intake

import (
	"context"
	"slices"
	"strings"

	"difaudit/dif"
)

// wideColumn is a column of answers that belongs to one item version.
type wideColumn struct {
	field int
	slot  int // place in a row of answers
	item  *item
}

// splitColumn is a column of answers to one of several versions of an item, told
// apart by the candidate's form.
type splitColumn struct {
	field int
	id    string
}

// wide reads a file with one row per candidate and one column per item.
type wide struct {
	*reading
	at       special
	columns  []wideColumn
	split    []splitColumn
	suspects []*suspect
	groups   []int // per used grouping: its column, -1 where absent
	forms    formReader
	template []byte // a row before it is filled
}

// readWide reads the rows.
func (r *reading) readWide(ctx context.Context) error {
	w := &wide{reading: r, forms: formReader{r.forms, map[string]int{}}}
	if !w.assign() {
		return nil
	}
	w.template = make([]byte, len(r.items.items))
	for i, it := range r.items.items {
		w.template[i] = blankCode
		if it.absent {
			w.template[i] = dif.CodeNotPresented
		}
	}
	r.newRecords(w.at, w.groups)
	for {
		record, err := r.responses.next()
		if err != nil {
			return err
		}
		if record == nil {
			break
		}
		if err := r.pause(ctx); err != nil {
			return err
		}
		w.row(record)
	}
	for _, s := range w.suspects {
		s.report(r.responses, r.items.declared, r.problems)
	}
	return nil
}

// row takes over one row.
func (w *wide) row(record []string) {
	t, rec := w.responses, w.records
	id := strings.TrimSpace(record[w.at.id])
	w.id = append(w.id[:0], id...)
	checkID(w.id, t, w.problems)
	rec.ids.Append(w.id)
	rec.rows = append(rec.rows, int32(t.row))
	form, formKnown := 0, true
	if w.at.form >= 0 {
		if form, formKnown = w.forms.read(record[w.at.form], t, w.problems); !formKnown {
			rec.formless[len(rec.rows)-1] = true
		}
	}
	if rec.form != nil {
		rec.form = append(rec.form, uint16(form))
	}
	if rec.attempt != nil {
		rec.attempt = append(rec.attempt, parseAttempt(record[w.at.attempt], t, w.problems))
	}
	if rec.external != nil {
		rec.external = append(rec.external, parseExternal(record[w.at.external], t, w.problems))
	}
	for g, field := range w.groups {
		if field >= 0 {
			rec.labels[g] = append(rec.labels[g], w.groupings[g].read(record[field], t, w.problems))
		}
	}
	row := rec.answers.Append()
	copy(row, w.template)
	lost := false
	for k := range w.columns {
		c := &w.columns[k]
		cell := record[c.field]
		if len(cell) == 1 {
			if code := c.item.enc.table[cell[0]]; code != escape {
				row[c.slot] = code
				if e := c.item.enc; code <= dif.MaxCode && int(code) > e.max {
					e.max = int(code)
				}
				continue
			}
		} else if len(cell) == 0 {
			continue // the template says what it is
		}
		code, why := c.item.enc.code(cell, t.row)
		row[c.slot] = code
		if why == accepted {
			continue
		}
		if c.item.enc.mode == presumed {
			w.suspects = append(w.suspects, &suspect{name: c.item.ID, field: c.field, row: t.row, distinct: map[string]bool{}})
			c.item.suspect, lost = true, true
			continue
		}
		refused(why, c.item, cell, c.item.ID, t, w.problems)
	}
	if lost {
		w.columns = slices.DeleteFunc(w.columns, func(c wideColumn) bool { return c.item.suspect })
	}
	if w.split != nil && formKnown && !w.forms.set.broken {
		w.versions(record, form, row)
	}
	for _, s := range w.suspects {
		s.look(record[s.field])
	}
}

// versions takes over the answers to items of several versions.
func (w *wide) versions(record []string, form int, row []byte) {
	for _, c := range w.split {
		cell := record[c.field]
		entry := w.forms.set.forms[form].byItem[c.id]
		if entry == nil {
			w.offForm(strings.TrimSpace(cell), c.id)
			continue
		}
		code, why := entry.item.enc.code(cell, w.responses.row)
		row[entry.item.index] = code
		if why != accepted {
			refused(why, entry.item, cell, c.id, w.responses, w.problems)
		}
	}
}

// assign decides what every column is and says whether rows can be read.
func (w *wide) assign() bool {
	t := w.responses
	ok := t.require(candidateColumn)
	w.at = w.specialColumns()
	w.groups = w.groupColumns()
	fieldOf := map[string]int{} // by item id
	var order []string
	for field, name := range t.header {
		switch w.columnUse(name) {
		case useItem, usePresumed:
			if _, twice := fieldOf[name]; !twice {
				fieldOf[name] = field
				order = append(order, name)
			}
		case useUndeclared:
			w.suspects = append(w.suspects, &suspect{name: name, field: field, row: t.row, distinct: map[string]bool{}})
		}
	}
	if !w.items.declared {
		w.itemsByColumn(order)
	}
	for i, it := range w.items.items {
		it.index = i
	}
	for _, name := range order {
		versions := w.items.byID[name]
		if len(versions) == 1 {
			w.columns = append(w.columns, wideColumn{fieldOf[name], versions[0].index, versions[0]})
		} else {
			if !w.forms.set.declared {
				w.forms.set.broken = true
				w.problems.add(versionAmbiguous, t.name, t.row, name,
					"the items file has %d versions of this item; give a forms file that says which form has which version", len(versions))
			}
			w.split = append(w.split, splitColumn{fieldOf[name], name})
		}
	}
	for _, it := range w.items.items {
		if _, has := fieldOf[it.ID]; !has {
			it.absent = true
			if w.items.declared {
				w.problems.add(itemColumnAbsent, t.name, 0, shown(it.ID), "no column holds the answers to this item; it counts as not presented to anybody")
			} else {
				w.forms.set.broken = true
				w.problems.add(unknownItem, it.file, it.row, "item_id", "the response file has no column for item %s; correct the identifier or add the column", shown(it.ID))
			}
		}
	}
	if len(w.columns)+len(w.split) == 0 {
		w.problems.add(noItems, t.name, t.row, "", "no column holds answers to items; name the columns by item as in the items file, or give scores 0 to 10")
		return false
	}
	return ok
}

// itemsByColumn puts the items of the forms file and the presumed ones in the order
// of their columns; items without a column stand behind.
func (w *wide) itemsByColumn(order []string) {
	c := newCatalogue()
	for _, name := range order {
		versions := w.items.byID[name]
		if versions == nil {
			it := w.newItem(name)
			it.enc = newEncoder(presumed, presumedMax, nil, w.missing)
			versions = []*item{it}
		}
		for _, it := range versions {
			c.add(it)
		}
	}
	for _, it := range w.items.items {
		if !slices.Contains(c.byID[it.ID], it) {
			c.add(it)
		}
	}
	*w.items = *c
}
