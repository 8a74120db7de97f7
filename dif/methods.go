package dif

import "slices"

// Method is one observed-score statistic, computed from the count tables of one item.
type Method interface {
	ID() string // stable; the key of its result inside a finding
	// New returns an empty result, to decode stored evidence into.
	New() Result
	// Test returns the result for one item, or nil where the method does not apply to
	// items of its kind. A value that does not exist is nil inside the result.
	Test(t *ItemTable, c Criteria) Result
}

// Result is the outcome of one method for one item. It marshals to the JSON object of
// its method in the evidence.
type Result interface {
	// Columns returns the values that stand in tables of findings, in a fixed order
	// and number.
	Columns() []Column
}

// Column is one value of a result for a table of findings.
type Column struct {
	Key     string   // as in the evidence
	Heading string   // short, for a printed table
	Value   *float64 // nil: does not exist
}

// Methods returns the methods of this version in the order of reports.
func Methods() []Method {
	return []Method{mantelHaenszel{}, breslowDay{}, standardization{}}
}

// plannedMethods are ids of the contract that this version refuses by name.
var plannedMethods = []string{
	"logistic", "polytomous", "generalized_mantel_haenszel", "likelihood_ratio", "empirical_bayes", "shealy_stout", "distractors",
}

func methodIDs() []string {
	var ids []string
	for _, m := range Methods() {
		ids = append(ids, m.ID())
	}
	return ids
}

func methodByID(id string) Method {
	i := slices.IndexFunc(Methods(), func(m Method) bool { return m.ID() == id })
	if i < 0 {
		return nil
	}
	return Methods()[i]
}
