package intake

import (
	"context"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"difaudit/dif"
)

// item is an item version while the files are read.
type item struct {
	dif.Item
	file       string // where it is described
	row        int
	scoreGiven bool            // max_score was declared
	broken     bool            // its description could not be used
	given      bool            // some row of a long file names it, or one of its versions
	absent     bool            // no column of a wide file names it
	suspect    bool            // presumed an item until a cell showed otherwise
	formKeys   []string        // key labels of forms, each once
	onForm     map[string]bool // the same
	enc        *encoder
	index      int // place in the data
}

// raw reports whether the item is answered with choices as far as was declared.
func (it *item) raw() bool {
	return len(it.Key) > 0 || it.Options != nil || len(it.formKeys) > 0
}

// keyOnForm takes over a key label of a form.
func (it *item) keyOnForm(label string) {
	if it.onForm == nil {
		it.onForm = map[string]bool{}
	}
	if !it.onForm[label] {
		it.onForm[label] = true
		it.formKeys = append(it.formKeys, label)
	}
}

// catalogue holds the items known so far.
type catalogue struct {
	items    []*item
	byID     map[string][]*item
	exact    map[itemVersion]*item
	declared bool // an items file was given
}

type itemVersion struct{ id, version string }

func newCatalogue() *catalogue {
	return &catalogue{byID: map[string][]*item{}, exact: map[itemVersion]*item{}}
}

func (c *catalogue) add(it *item) {
	c.items = append(c.items, it)
	c.byID[it.ID] = append(c.byID[it.ID], it)
	c.exact[itemVersion{it.ID, it.Version}] = it
}

// version returns the item with an identifier and version; an empty version means
// the only one. false where there is none or several.
func (c *catalogue) version(id, version string) (*item, bool) {
	if versions := c.byID[id]; version == "" && len(versions) == 1 {
		return versions[0], true
	}
	it, known := c.exact[itemVersion{id, version}]
	return it, known
}

var itemColumns = []string{"item_id", "version", "key", "max_score", "options", "content_area", "role"}

// readItems reads the items file into the catalogue.
func readItems(ctx context.Context, f *File, c *catalogue, problems *Problems) (*table, error) {
	c.declared = true
	t, err := openTable(f, newHeaderRule(1, itemColumns, strings.Join(itemColumns, ", ")+" (item_id is required)"), problems)
	if t == nil {
		return nil, err
	}
	if !t.require("item_id") {
		return t, nil
	}
	t.allow(itemColumns...)
	for {
		record, err := t.next()
		if record == nil || err != nil {
			if err == nil && t.rows == 0 && !problems.HasErrors() {
				problems.add(noRows, t.name, 0, "", "the items file describes no item; add one row per item")
			}
			return t, err
		}
		if err := ctx.Err(); err != nil {
			return t, err
		}
		it := readItem(t, record, problems)
		if it == nil {
			continue
		}
		if before, known := c.version(it.ID, it.Version); known && before.Version == it.Version {
			repeatedItem(before, it, problems)
			continue
		}
		if len(c.items) == maxColumns {
			problems.add(tooLarge, t.name, t.row, "", "the file describes more than %d items, which is the limit", maxColumns)
			return t, nil
		}
		c.add(it)
	}
}

// repeatedItem reports a second row for an item version.
func repeatedItem(before, it *item, problems *Problems) {
	column := shown(it.ID)
	switch {
	case !sameLabels(before.Key, it.Key):
		problems.add(keyContradictory, it.file, it.row, column,
			"row %d has another key for this item and version; keep one row, or give the versions different names", before.row)
	case before.MaxScore == it.MaxScore && before.scoreGiven == it.scoreGiven && before.Role == it.Role &&
		before.ContentArea == it.ContentArea && slices.Equal(before.Options, it.Options):
		problems.add(duplicateItemRow, it.file, it.row, column, "row %d is the same; this row is not used", before.row)
	default:
		problems.add(conflictingItem, it.file, it.row, column,
			"row %d describes this item and version differently; keep one row, or give the versions different names", before.row)
	}
}

// sameLabels compares two sets of labels.
func sameLabels(a, b []string) bool {
	a, b = slices.Clone(a), slices.Clone(b)
	slices.Sort(a)
	slices.Sort(b)
	return slices.Equal(a, b)
}

// readItem returns the item of one row; nil where it has no identifier.
func readItem(t *table, record []string, problems *Problems) *item {
	it := &item{file: t.name, row: t.row}
	bad := func(kind, column, format string, args ...any) {
		problems.add(kind, t.name, t.row, column, format, args...)
		it.broken = true
	}
	cell := func(name string) string {
		value := strings.ToValidUTF8(t.cell(record, name), "")
		if value != t.cell(record, name) {
			bad(badEncoding, name, "the cell is not UTF-8; save the file as UTF-8")
		}
		if len(value) > maxNameBytes && name != "key" && name != "options" {
			bad(badValue, name, "the cell is longer than %s; shorten it, or check the quotation marks of this row", nameLimit)
			return ""
		}
		return strings.Clone(value)
	}
	it.ID = cell("item_id")
	if it.ID == "" {
		if t.cell(record, "item_id") == "" {
			bad(badValue, "item_id", "the row has no item identifier; give one or remove the row")
		}
		return nil
	}
	it.Version = cell("version")
	if it.Version == "" {
		it.Version = "1"
	}
	it.ContentArea = cell("content_area")
	it.Role = cell("role")
	switch it.Role {
	case "":
		it.Role = dif.RoleOperational
	case dif.RoleOperational, dif.RolePretest, dif.RoleLinking:
	default:
		bad(badValue, "role", "%s is not a role; use operational, pretest or linking", quoted(it.Role))
		it.Role = dif.RoleOperational
	}
	if text := cell("max_score"); text != "" {
		n, ok := plainInteger(text)
		if !ok {
			bad(badValue, "max_score", "%s is not a highest score; give a whole number from 0 to %d", quoted(text), dif.MaxCode)
		} else {
			it.MaxScore, it.scoreGiven = n, true
		}
	}
	var err error
	if text := cell("options"); text != "" {
		if it.Options, err = options(text); err != nil {
			bad(badValue, "options", "%v", err)
		}
	}
	if text := cell("key"); text != "" {
		if it.Key, err = labels(text); err != nil {
			bad(badValue, "key", "%v", err)
		}
	}
	for _, k := range it.Key {
		if it.Options != nil && !slices.Contains(it.Options, k) {
			bad(keyNotAnOption, "key", "the key of item %s names %s, which is not among its options %s; correct the key or the options",
				shown(it.ID), quoted(k), quoted(strings.Join(it.Options, "|")))
		}
	}
	if it.scoreGiven && it.MaxScore != 1 && it.raw() {
		bad(badValue, "max_score", "an item with a key or options is scored 0 or 1; set max_score to 1 or leave it empty, or remove key and options if the answers are scores")
	}
	return it
}

// options reads the options of an item: labels joined by | or their number.
func options(text string) ([]string, error) {
	if n, err := strconv.Atoi(text); err == nil {
		if n < 2 || n > 26 {
			return nil, fmt.Errorf("%s is not a number of options; give 2 to 26, or the labels joined by |", quoted(text))
		}
		var out []string
		for i := range n {
			out = append(out, string(rune('A'+i)))
		}
		return out, nil
	}
	return labels(text)
}

// labels reads labels joined by |.
func labels(text string) ([]string, error) {
	if n := 1 + strings.Count(text, "|"); n > maxChoices {
		return nil, fmt.Errorf("%d labels are too many; %d is the limit", n, maxChoices)
	}
	parts := strings.Split(text, "|")
	for i, p := range parts {
		parts[i] = strings.TrimSpace(p)
		switch {
		case parts[i] == "":
			return nil, fmt.Errorf("%s has an empty part; join labels with a single |", quoted(text))
		case len(parts[i]) > maxNameBytes:
			return nil, fmt.Errorf("a label is longer than %s; shorten it, or join labels with |", nameLimit)
		}
	}
	sorted := slices.Clone(parts)
	slices.Sort(sorted)
	if len(slices.Compact(sorted)) < len(parts) {
		return nil, fmt.Errorf("%s names a label twice; name each once", quoted(text))
	}
	return parts, nil
}

// prepare gives every item its encoder, once items and forms are known.
func (c *catalogue) prepare(missing map[string]byte, problems *Problems) {
	for _, it := range c.items {
		it.prepare(missing, c.declared, problems)
	}
}

func (it *item) prepare(missing map[string]byte, declared bool, problems *Problems) {
	var known []string
	switch {
	case it.broken:
		it.enc = newEncoder(open, 0, nil, missing)
	case it.Options != nil:
		known = it.Options
		it.enc = newEncoder(choices, 0, known, missing)
	case it.raw():
		known = append(slices.Clone(it.Key), it.formKeys...)
		it.enc = newEncoder(open, 0, known, missing)
	case it.scoreGiven:
		it.enc = newEncoder(scored, it.MaxScore, nil, missing)
		for s := range it.MaxScore + 1 {
			known = append(known, strconv.Itoa(s))
		}
	case declared:
		it.enc = newEncoder(undecided, 0, nil, missing)
	default:
		it.enc = newEncoder(scored, presumedMax, nil, missing)
	}
	var lost []string
	for _, label := range known {
		if _, is := missing[label]; is && !slices.Contains(lost, label) {
			lost = append(lost, label)
		}
	}
	if lost != nil {
		problems.add(codeIsOption, it.file, it.row, shown(it.ID),
			"%s is both a possible answer to this item and declared as a code of missing answers; it is read as missing. Declare another code if that is wrong",
			quoted(strings.Join(lost, ", ")))
	}
}
