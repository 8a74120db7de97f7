package intake

import (
	"fmt"
	"strconv"
	"strings"
	"unicode/utf8"
)

// Severity says whether a problem stops the audit.
type Severity string

// Severities of a problem.
const (
	Error   Severity = "error"
	Warning Severity = "warning"
)

// maxOccurrences is how many occurrences of one kind are kept; all are counted.
const maxOccurrences = 100

// Problems collects what is wrong with the files of one request. As an error it
// holds at least one kind of severity Error. No message holds an identifier of a
// candidate or a group label found in a file.
type Problems struct {
	Kinds []Kind `json:"kinds"` // errors first, each severity in order of first occurrence
}

// Kind is one kind of problem and where it occurred.
type Kind struct {
	Kind        string       `json:"kind"` // stable code in snake_case
	Severity    Severity     `json:"severity"`
	About       string       `json:"about"` // the kind in a few words
	Count       int          `json:"count"` // all occurrences
	Occurrences []Occurrence `json:"occurrences"`
}

// Occurrence is one place where a problem was met.
type Occurrence struct {
	File    string `json:"file"`
	Row     int    `json:"row"`     // line of the file on which the record starts, the header being row 1; 0: the whole file
	Column  string `json:"column"`  // name of the column, or of the item; may be empty
	Message string `json:"message"` // what is wrong and what to do
}

// String returns place and message in one sentence.
func (o Occurrence) String() string { return o.place() + ": " + o.Message }

// place names file, row and column.
func (o Occurrence) place() string {
	place := o.File
	if o.Row > 0 {
		place += fmt.Sprintf(", row %d", o.Row)
	}
	if o.Column != "" {
		place += ", column " + o.Column
	}
	return place
}

// Error returns a one-line summary.
func (p *Problems) Error() string {
	errors, first := 0, ""
	var kinds []string
	for _, k := range p.Kinds {
		if k.Severity != Error {
			continue
		}
		errors += k.Count
		kinds = append(kinds, fmt.Sprintf("%s (%d)", k.Kind, k.Count))
		if first == "" && len(k.Occurrences) > 0 {
			first = k.Occurrences[0].String()
		}
	}
	if errors == 1 {
		return first
	}
	return fmt.Sprintf("%d problems in the input: %s; first: %s", errors, strings.Join(kinds, ", "), first)
}

// HasErrors reports whether some problem stops the audit.
func (p *Problems) HasErrors() bool {
	for i := range p.Kinds {
		if p.Kinds[i].Severity == Error {
			return true
		}
	}
	return false
}

// Count returns how often a kind occurred.
func (p *Problems) Count(kind string) int {
	for i := range p.Kinds {
		if p.Kinds[i].Kind == kind {
			return p.Kinds[i].Count
		}
	}
	return 0
}

// add counts one occurrence and keeps it while the kind has room.
func (p *Problems) add(kind, file string, row int, column, format string, args ...any) {
	k := p.kind(kind)
	k.Count++
	if len(k.Occurrences) < maxOccurrences {
		k.Occurrences = append(k.Occurrences, Occurrence{
			File: file, Row: row, Column: shown(column), Message: fmt.Sprintf(format, args...),
		})
	}
}

// kind returns the entry of a kind, new where it is the first of its kind.
func (p *Problems) kind(code string) *Kind {
	for i := range p.Kinds {
		if p.Kinds[i].Kind == code {
			return &p.Kinds[i]
		}
	}
	about, severity := describe(code)
	p.Kinds = append(p.Kinds, Kind{Kind: code, Severity: severity, About: about})
	return &p.Kinds[len(p.Kinds)-1]
}

// settle puts errors before warnings, each in order of first occurrence.
func (p *Problems) settle() {
	var errors, warnings []Kind
	for _, k := range p.Kinds {
		if k.Severity == Error {
			errors = append(errors, k)
		} else {
			warnings = append(warnings, k)
		}
	}
	p.Kinds = append(errors, warnings...)
}

// maxQuoted is how many characters of an item cell a message shows.
const maxQuoted = 40

// quoted returns the value of an item cell for a message: quoted, and cut.
func quoted(value string) string {
	n := 0
	for i := range value {
		if n == maxQuoted {
			return strconv.Quote(value[:i]) + " (cut)"
		}
		n++
	}
	return strconv.Quote(value)
}

// shown returns a name from a file (a column, an item) fit for a message: printable
// and cut to 60 characters.
func shown(name string) string {
	const limit = 60
	if utf8.RuneCountInString(name) > limit {
		name = string([]rune(name)[:limit]) + "…"
	}
	if q := strconv.Quote(name); !utf8.ValidString(name) || strings.Contains(q, `\`) {
		return q
	}
	return name
}
