package reports

import (
	"fmt"
	"math"

	"difaudit/dif"
)

// class returns the letter to show: the class, or the provisional letter.
func (f *exposedFinding) class() (letter string, provisional bool) {
	if k := f.Classification; k.Class != nil {
		return *k.Class, false
	}
	return value(f.Classification.ComputedClass), true
}

// flagged reports whether the letter, provisional or not, is B or C.
func (f *exposedFinding) flagged() bool {
	letter, _ := f.class()
	return severity(letter) == 'B' || severity(letter) == 'C'
}

// verdict words the outcome for a table: the letter, or the reason behind a
// provisional letter in parentheses.
func (f *exposedFinding) verdict() string {
	letter, provisional := f.class()
	if !provisional {
		return letter
	}
	reason := "no verdict"
	if r := f.Classification.Reason; r != nil {
		reason = shortReason(*r)
	}
	if letter == "" {
		return reason
	}
	return "(" + letter + ") " + reason
}

// name returns the item with its version where that is not the first.
func (f *exposedFinding) name() string { return itemName(f.Item, f.Version) }

const longestName = 400 // characters of an identifier that are printed

func itemName(item, version string) string {
	item, version = shortenRunes(item, longestName), shortenRunes(version, 60)
	if version == "" || version == "1" {
		return item
	}
	return item + " (version " + version + ")"
}

// nonUniform reports whether the difference changes with the score.
func (f *exposedFinding) nonUniform() bool { return f.warned(dif.WarnNonUniform) }

func (f *exposedFinding) warned(code string) bool {
	for _, w := range f.Warnings {
		if w.Code == code {
			return true
		}
	}
	return false
}

// differenceSentence says in words what the picture of a flagged item shows.
func (f *exposedFinding) differenceSentence(reference, focal string) string {
	s := f.Standardization()
	if s == nil || s.PDif == nil {
		return ""
	}
	n := math.Round(math.Abs(*s.PDif) * 100)
	size := fmt.Sprintf("about %.0f in every 100", n)
	if n < 1 {
		size = "fewer than 1 in every 100"
	}
	way := "less"
	if *s.PDif > 0 {
		way = "more"
	}
	return fmt.Sprintf("At equal matching scores, candidates of the focal group (%s) answered right %s often than those of the reference group (%s): %s.",
		focal, way, reference, size)
}

// reasonText words why no D-DIF exists.
func (f *exposedFinding) reasonText() string {
	text := ""
	if f.Classification.Reason != nil {
		text = shortReason(*f.Classification.Reason)
	}
	if d := detailText(f.Classification.Detail); d != "" {
		if text != "" {
			text += ": "
		}
		text += d
	}
	if text == "" {
		text = "no D-DIF"
	}
	return text
}

// value returns a value of a method's result by its key, nil where it does not exist.
func (f *exposedFinding) value(method, key string) *float64 {
	result := f.Results.Of(method)
	if result == nil {
		return nil
	}
	for _, c := range result.Columns() {
		if c.Key == key {
			return finite(c.Value)
		}
	}
	return nil
}

func finite(x *float64) *float64 {
	if x == nil || math.IsNaN(*x) || math.IsInf(*x, 0) {
		return nil
	}
	return x
}
