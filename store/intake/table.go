package intake

import (
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"strings"
	"unicode/utf8"
)

// maxNameBytes bounds identifiers, labels, names and choices, which nameLimit says in words.
const (
	maxNameBytes = 1000
	nameLimit    = "1,000 bytes"
)

// maxColumns bounds the columns of a file and the items of a request.
const maxColumns = 10_000

// table reads the rows of one CSV file under its header.
type table struct {
	text     *text
	csv      *csv.Reader
	problems *Problems
	name     string
	header   []string       // names without spaces around them
	column   map[string]int // by name
	row      int            // line on which the current record starts
	rows     int            // data rows so far
	blanks   int            // rows without any content, skipped
	blankAt  int            // the first of them
	unnamed  []int          // columns without a name
	cut      bool           // rows behind a fault were not read
	dropped  int            // rows left out for their number of fields or a quotation mark
	complete bool           // the header has the columns it must have
}

// openTable reads the header. It returns nil without an error where the file has no
// usable header, which is then among the problems.
func openTable(f *File, rule *headerRule, problems *Problems) (*table, error) {
	text, err := openText(f)
	if err != nil {
		return nil, failed(f.Name, 0, err, problems)
	}
	t := &table{text: text, problems: problems, name: f.Name, column: map[string]int{}}
	comma := delimiter(text.lines)
	t.csv = csv.NewReader(text.lines)
	t.csv.Comma = comma
	t.csv.FieldsPerRecord = -1
	t.csv.ReuseRecord = true
	header, err := t.csv.Read()
	if err == io.EOF {
		err = &fault{emptyFile, "the file holds no row; it needs a header row and data rows"}
	}
	if err != nil {
		return nil, failed(f.Name, 1, err, problems)
	}
	if len(header) > maxColumns {
		err = &fault{tooLarge, fmt.Sprintf("the header has %d columns; %d is the limit", len(header), maxColumns)}
		return nil, failed(f.Name, 1, err, problems)
	}
	if !t.readHeader(header, rule) {
		return nil, nil
	}
	return t, nil
}

// readHeader takes over the names of the columns and says whether rows can be read.
// Where a required column is missing, the row may be data: its cells are not repeated.
func (t *table) readHeader(header []string, rule *headerRule) bool {
	t.row, _ = t.csv.FieldPos(0)
	for _, name := range header {
		if strings.Contains(strings.TrimSpace(name), "\r") {
			t.problems.add(badLineEnds, t.name, t.row, "", "lines end in a carriage return alone; save the file with line feeds")
			return false
		}
		t.header = append(t.header, strings.Clone(strings.TrimSpace(name)))
	}
	if rule.absent(t.header) {
		t.problems.add(noHeader, t.name, t.row, "",
			"the first row holds none of the expected names, or looks like data. The file needs a header line that names its columns, separated by comma, semicolon or tab: %s", rule.advice)
		return false
	}
	t.complete = rule.complete(t.header)
	for i, name := range t.header {
		before, twice := t.column[name]
		switch {
		case !utf8.ValidString(name):
			t.problems.add(badEncoding, t.name, t.row, fmt.Sprint(i+1), "the name of the column is not UTF-8; save the file as UTF-8")
		case len(name) > maxNameBytes:
			t.problems.add(badValue, t.name, t.row, fmt.Sprint(i+1), "the name of the column is longer than %s; shorten it, and check the quotation marks of the header", nameLimit)
		case name == "":
			t.unnamed = append(t.unnamed, i)
		case twice:
			column := name
			if !t.complete {
				column = fmt.Sprint(i + 1)
			}
			t.problems.add(duplicateColumn, t.name, t.row, column,
				"columns %d and %d have the same name; rename or remove one", before+1, i+1)
		default:
			t.column[name] = i
		}
	}
	return true
}

// require reports the columns of the list that the header lacks and says whether it has all.
func (t *table) require(names ...string) bool {
	ok := true
	for _, name := range names {
		if _, has := t.column[name]; !has {
			t.problems.add(missingColumn, t.name, t.row, name, "the header has no column %s; the first row must hold the names of the columns", name)
			ok = false
		}
	}
	return ok
}

// allow reports the columns that are none of the names.
func (t *table) allow(names ...string) {
	known := map[string]bool{"": true}
	for _, name := range names {
		known[name] = true
	}
	for _, name := range t.header {
		if !known[name] {
			t.problems.add(undeclaredColumn, t.name, t.row, name,
				"this file may have the columns %s; rename or remove this one", strings.Join(names, ", "))
		}
	}
}

// cell returns the trimmed cell of a named column, empty where the file lacks the column.
func (t *table) cell(record []string, name string) string {
	i, has := t.column[name]
	if !has || i >= len(record) {
		return ""
	}
	return strings.TrimSpace(record[i])
}

// next returns the next record with as many fields as the header. It reports rows
// that have not and skips blank ones. At the end, and where reading cannot go on, it
// returns nil; the error tells a failure of reading.
func (t *table) next() ([]string, error) {
	for {
		t.text.recordAt = t.csv.InputOffset()
		record, err := t.csv.Read()
		if err == io.EOF {
			return nil, nil
		}
		if t.skips(err) {
			continue
		}
		if err != nil {
			t.cut = true
			return nil, failed(t.name, t.row+1, err, t.problems)
		}
		t.row, _ = t.csv.FieldPos(0)
		switch {
		case strings.TrimSpace(record[0]) == "" && blank(record):
			if t.blanks == 0 {
				t.blankAt = t.row
			}
			t.blanks++
			continue
		case len(record) != len(t.header):
			t.rows++
			t.dropped++
			t.problems.add(raggedRow, t.name, t.row, "",
				"the row has %s and the header %d; check the delimiters and quotation marks of this row", plural(len(record), "field"), len(t.header))
			continue
		case t.repeats(record):
			t.problems.add(repeatedHeader, t.name, t.row, "", "the row repeats the header; remove it, and check that the files put together have the same columns")
			continue
		}
		t.rows++
		for _, i := range t.unnamed {
			if strings.TrimSpace(record[i]) != "" {
				t.problems.add(unnamedColumn, t.name, t.row, fmt.Sprint(i+1), "the column has values and no name; name or remove it")
				t.unnamed = nil
				break
			}
		}
		return record, nil
	}
}

// skips reports a quotation mark inside a field that does not start with one. Where
// the row ends is clear then, so that reading can go on behind it.
func (t *table) skips(err error) bool {
	var parse *csv.ParseError
	if !errors.As(err, &parse) || !errors.Is(parse.Err, csv.ErrBareQuote) {
		return false
	}
	t.row = parse.StartLine
	t.rows++
	t.dropped++
	t.problems.add(badQuoting, t.name, t.row, "",
		"a quotation mark stands inside a field that does not start with one; put such fields in quotation marks and double those inside. This row was not read")
	return true
}

// gaps reports whether some rows were not read.
func (t *table) gaps() bool { return t.cut || t.dropped > 0 }

func blank(record []string) bool {
	for _, cell := range record {
		if strings.TrimSpace(cell) != "" {
			return false
		}
	}
	return true
}

func (t *table) repeats(record []string) bool {
	for i, cell := range record {
		if cell != t.header[i] && strings.TrimSpace(cell) != t.header[i] {
			return false
		}
	}
	return true
}

// failed reports what is wrong with a file among the problems and returns nil, or
// returns the error where reading itself failed.
func failed(name string, row int, err error, problems *Problems) error {
	var broken *fault
	var parse *csv.ParseError
	switch {
	case errors.As(err, &broken):
		switch broken.kind {
		case binaryContent, unreadableGzip, gzipTooLarge, gzipRatio:
			row = 0 // noticed ahead of the row being read
		}
		problems.add(broken.kind, name, row, "", "%s", broken.message)
		return nil
	case errors.As(err, &parse):
		what, so := "a quotation mark stands inside a field that does not start with one", "Without its header the file was not read"
		if errors.Is(parse.Err, csv.ErrQuote) {
			what, so = "a quoted field does not end where it should", "Where the row ends is not clear, so that this row and those after it were not read"
		}
		problems.add(badQuoting, name, parse.StartLine, "",
			"%s; put such fields in quotation marks and double those inside. %s", what, so)
		return nil
	}
	return fmt.Errorf("read %s: %w", name, err)
}
