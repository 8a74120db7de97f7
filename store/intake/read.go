// Package intake reads the files of an audit: responses (wide or long), items, forms,
// candidates and the plan. It checks every row, reports all problems together with
// file, row and column, and returns the data an audit runs on.
package intake

import (
	"context"
	"errors"
	"io"

	"difaudit/dif"
)

// File is one file to read.
type File struct {
	Name   string // as messages show it
	Reader io.Reader
}

// Request says what to read. The plan must be valid.
type Request struct {
	Responses      *File // required
	Items          *File
	Forms          *File
	Candidates     *File
	Plan           dif.Plan
	Administration string         // the client's own identifier; empty: none
	Progress       func(rows int) // called with the response rows read so far; may be nil
}

// Result is what reading gives where nothing stops the audit.
type Result struct {
	Data     *dif.Data
	Notes    []string  // what was taken for what, in sentences, to be shown first; they hold group labels and their counts
	Problems *Problems // warnings only
}

// Read reads all files of a request. It returns a *Problems error where the input has
// errors, and another error where reading itself failed or the context ended.
func Read(ctx context.Context, req Request) (*Result, error) {
	if req.Responses == nil {
		return nil, errors.New("read files: no response file given")
	}
	r := &reading{
		request: req, plan: req.Plan, problems: &Problems{Kinds: []Kind{}},
		items: newCatalogue(), forms: newFormSet(), missing: missingCodes(req.Plan.Missing),
	}
	for _, name := range req.Plan.UsedGroupings() {
		r.groupings = append(r.groupings, newGrouping(name, req.Plan.Groupings[name]))
	}
	if err := r.readFiles(ctx); err != nil {
		return nil, err
	}
	var data *dif.Data
	if r.records != nil && len(r.records.rows) > 0 {
		data = r.settle()
	}
	r.problems.settle()
	if r.problems.HasErrors() {
		return nil, r.problems
	}
	return &Result{Data: data, Notes: r.notes(data), Problems: r.problems}, nil
}

// reading is the state of one request.
type reading struct {
	request    Request
	plan       dif.Plan
	problems   *Problems
	missing    map[string]byte // by declared code of missing answers
	items      *catalogue
	forms      *formSet
	groupings  []*grouping // that the plan uses, by name
	candidates *candidates // nil without a candidates file
	responses  *table
	records    *records
	long       bool // the responses have one row per candidate and item
	lost       bool // some row of a long file could not be used
	sources    []dif.Source
	join       joinCounts
	id         []byte
}

// readFiles reads items, forms, candidates and responses, in this order.
func (r *reading) readFiles(ctx context.Context) error {
	var tables [4]*table // in the order of sources
	var err error
	if f := r.request.Items; f != nil {
		if tables[1], err = readItems(ctx, f, r.items, r.problems); err != nil {
			return err
		}
	}
	if f := r.request.Forms; f != nil {
		if tables[2], err = readForms(ctx, f, r.forms, r.items, r.problems); err != nil {
			return err
		}
	}
	if f := r.request.Candidates; f != nil {
		if r.candidates, err = readCandidates(ctx, f, r.candidateHeader(), r.groupings, r.problems); err != nil {
			return err
		}
		if r.candidates != nil {
			tables[3] = r.candidates.table
		}
	}
	r.items.prepare(r.missing, r.problems)
	if r.responses, err = openTable(r.request.Responses, r.responseHeader(), r.problems); err != nil {
		return err
	}
	tables[0] = r.responses
	if r.responses != nil && !(r.items.declared && len(r.items.items) == 0) {
		if err := r.readResponses(ctx); err != nil {
			return err
		}
		r.missingGroupings()
	}
	r.describe(tables)
	return nil
}

// readResponses reads the response file in the shape its header shows.
func (r *reading) readResponses(ctx context.Context) error {
	t := r.responses
	_, hasItem := t.column["item_id"]
	_, hasResponse := t.column["response"]
	r.long = hasItem && hasResponse
	read := r.readWide
	if r.long {
		read = r.readLong
	}
	if err := read(ctx); err != nil {
		return err
	}
	if t.rows == 0 && !t.cut && r.records != nil {
		r.problems.add(noCandidates, t.name, 0, "", "the file has a header and no row below it; add one row per candidate, or per candidate and item")
	}
	return nil
}

// pause looks at the context and reports progress now and then.
func (r *reading) pause(ctx context.Context) error {
	if r.responses.rows%checkEvery == 0 {
		if err := ctx.Err(); err != nil {
			return err
		}
	}
	if r.request.Progress != nil && r.responses.rows%progressEvery == 0 {
		r.request.Progress(r.responses.rows)
	}
	return nil
}

// describe lists the files as sources of the data.
func (r *reading) describe(tables [4]*table) {
	var administration *string
	if r.request.Administration != "" {
		administration = &r.request.Administration
	}
	for i, kind := range []string{"responses", "items", "forms", "candidates"} {
		if t := tables[i]; t != nil {
			r.sources = append(r.sources, dif.Source{
				Administration: administration, Kind: kind, SHA256: t.text.sha256(), Rows: t.rows,
			})
		}
	}
}

// offForm reports a cell about an item that is not on the candidate's form.
func (r *reading) offForm(cell, id string) {
	t := r.responses
	code, is := r.missing[cell]
	switch {
	case cell == "" || is && code == dif.CodeNotPresented:
	case is && code != dif.CodeInvalid:
		r.problems.add(missingCodeOffForm, t.name, t.row, shown(id), "the candidate's form does not hold this item; the answer counts as not presented")
	default:
		r.problems.add(answerOffForm, t.name, t.row, shown(id), "there is an answer and the candidate's form does not hold this item; correct the form of the row or the forms file")
	}
}
