package intake

import (
	"cmp"
	"context"
	"slices"
	"strconv"
	"strings"

	"difaudit/dif"
)

// maxForms bounds the forms of a request; a form is held in 16 bits per candidate.
const maxForms = 1 << 16

// form is one form while the files are read.
type form struct {
	id      string
	entries []*formEntry // nil: only the label is known
	byItem  map[string]*formEntry
	byPlace map[int]*formEntry // by position
}

// formEntry is one row of the forms file.
type formEntry struct {
	item     *item
	position int
	key      []string
	order    []string
	row      int
}

// formSet holds the forms of a request.
type formSet struct {
	name     string // of the file
	declared bool   // a forms file was given
	broken   bool   // some row of it could not be used, or who sat which form is not known
	forms    []*form
	byID     map[string]int
}

func newFormSet() *formSet { return &formSet{byID: map[string]int{}} }

// label returns the number of a form, a new one where it is not known yet; false
// where there is no room.
func (s *formSet) label(id string) (int, bool) {
	if i, known := s.byID[id]; known {
		return i, true
	}
	if len(s.forms) == maxForms {
		return 0, false
	}
	id = strings.Clone(id)
	s.forms = append(s.forms, &form{id: id})
	s.byID[id] = len(s.forms) - 1
	return len(s.forms) - 1, true
}

var formColumns = []string{"form", "position", "item_id", "version", "key", "option_order"}

// readForms reads the forms file. Without an items file the items it names become known.
func readForms(ctx context.Context, f *File, s *formSet, c *catalogue, problems *Problems) (*table, error) {
	s.declared, s.name = true, f.Name
	t, err := openTable(f, newHeaderRule(3, formColumns, strings.Join(formColumns, ", ")+" (the first three are required)"), problems)
	if t == nil {
		s.broken = true
		return nil, err
	}
	if !t.require("form", "position", "item_id") {
		s.broken = true
		return t, nil
	}
	t.allow(formColumns...)
	for {
		record, err := t.next()
		if err != nil {
			return t, err
		}
		if record == nil {
			break
		}
		if err := ctx.Err(); err != nil {
			return t, err
		}
		s.readEntry(t, record, c, problems)
	}
	s.broken = s.broken || t.gaps() || len(s.forms) == 0
	if t.rows == 0 {
		problems.add(noRows, t.name, 0, "", "the forms file describes no form; add one row per form and item")
	}
	for _, f := range s.forms {
		slices.SortFunc(f.entries, func(a, b *formEntry) int { return cmp.Compare(a.position, b.position) })
	}
	return t, s.checkKeys(ctx, c, problems)
}

// readEntry takes over one row of the forms file.
func (s *formSet) readEntry(t *table, record []string, c *catalogue, problems *Problems) {
	bad := func(kind, column, format string, args ...any) {
		problems.add(kind, t.name, t.row, column, format, args...)
		s.broken = true
	}
	for _, name := range formColumns {
		if value := t.cell(record, name); value != strings.ToValidUTF8(value, "") {
			bad(badEncoding, name, "the cell is not UTF-8; save the file as UTF-8")
			return
		}
		if len(t.cell(record, name)) > maxNameBytes && (name == "form" || name == "item_id" || name == "version") {
			bad(badValue, name, "the cell is longer than %s; shorten it, or check the quotation marks of this row", nameLimit)
			return
		}
	}
	id, text := t.cell(record, "form"), t.cell(record, "item_id")
	if id == "" || text == "" {
		bad(badValue, "", "form and item_id must both be given; complete or remove the row")
		return
	}
	position, err := strconv.Atoi(t.cell(record, "position"))
	if err != nil || position < 0 || position > 1<<30 {
		bad(badValue, "position", "%s is not a position; give a whole number", quoted(t.cell(record, "position")))
		return
	}
	e := &formEntry{position: position, row: t.row}
	if e.item = s.findItem(t, text, t.cell(record, "version"), c, problems); e.item == nil {
		s.broken = true
		return
	}
	number, ok := s.label(id)
	if !ok {
		bad(tooLarge, "form", "the file describes more than %d forms, which is the limit", maxForms)
		return
	}
	f := s.forms[number]
	if text := t.cell(record, "key"); text != "" {
		if e.key, err = labels(strings.Clone(text)); err != nil {
			bad(badValue, "key", "%v", err)
		}
		for _, k := range e.key {
			if e.item.Options != nil && !slices.Contains(e.item.Options, k) {
				bad(keyNotAnOption, "key", "the key of item %s on this form names %s, which is not among its options %s; correct the key or the options",
					shown(e.item.ID), quoted(k), quoted(strings.Join(e.item.Options, "|")))
				e.key = nil
				break
			}
		}
		if e.item.scoreGiven && e.item.MaxScore != 1 {
			bad(badValue, "key", "item %s has max_score %d, and an item with a key is scored 0 or 1; correct one of them", shown(e.item.ID), e.item.MaxScore)
		}
	}
	if text := t.cell(record, "option_order"); text != "" {
		if e.order, err = labels(strings.Clone(text)); err != nil {
			bad(optionOrderWrong, "option_order", "%v", err)
		} else if e.item.Options != nil && !sameLabels(e.order, e.item.Options) {
			bad(optionOrderWrong, "option_order", "the order must hold each option of item %s once (%s)", shown(e.item.ID), quoted(strings.Join(e.item.Options, "|")))
			e.order = nil
		}
	}
	if before, twice := f.byPlace[position]; twice {
		bad(duplicateOnForm, "position", "row %d has the same form and position; number the items of a form differently", before.row)
	}
	if before, twice := f.byItem[e.item.ID]; twice {
		bad(duplicateOnForm, "item_id", "row %d has the same item on the same form; remove one of them", before.row)
		return
	}
	if f.byItem == nil {
		f.byItem, f.byPlace = map[string]*formEntry{}, map[int]*formEntry{}
	}
	f.byItem[e.item.ID] = e
	if f.byPlace[position] == nil {
		f.byPlace[position] = e
	}
	f.entries = append(f.entries, e)
	for _, k := range e.key {
		e.item.keyOnForm(k)
	}
}

// findItem returns the item version a row of the forms file names.
func (s *formSet) findItem(t *table, id, version string, c *catalogue, problems *Problems) *item {
	if !c.declared && version == "" {
		version = "1"
	}
	if it, known := c.version(id, version); known {
		return it
	}
	switch {
	case !c.declared:
		if len(c.items) == maxColumns {
			problems.add(tooLarge, t.name, t.row, "", "the file names more than %d items, which is the limit", maxColumns)
			return nil
		}
		it := &item{file: t.name, row: t.row}
		it.ID, it.Version, it.Role = strings.Clone(id), strings.Clone(version), dif.RoleOperational
		c.add(it)
		return it
	case len(c.byID[id]) == 0:
		problems.add(unknownItem, t.name, t.row, "item_id", "item %s is not in the items file; add it there or correct the identifier", shown(id))
	case version == "":
		problems.add(versionAmbiguous, t.name, t.row, "version", "the items file has %d versions of item %s; say which one this form has", len(c.byID[id]), shown(id))
	default:
		problems.add(unknownItem, t.name, t.row, "version", "the items file has item %s and not this version of it; add it there or correct the version", shown(id))
	}
	return nil
}

// finish puts the forms into the data, sorted bytewise.
func (s *formSet) finish(d *dif.Data) {
	ids := make([]string, 0, len(s.forms))
	for _, f := range s.forms {
		ids = append(ids, f.id)
	}
	slices.Sort(ids)
	recode := make([]uint16, len(s.forms))
	for place, id := range ids {
		f := s.forms[s.byID[id]]
		recode[s.byID[id]] = uint16(place)
		out := dif.Form{ID: id}
		for _, e := range f.entries {
			out.Items = append(out.Items, dif.FormItem{Item: e.item.index, Position: e.position, Key: e.key, OptionOrder: e.order})
		}
		d.Forms = append(d.Forms, out)
	}
	for i, f := range d.FormOf {
		d.FormOf[i] = recode[f]
	}
}
