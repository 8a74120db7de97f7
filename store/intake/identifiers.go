package intake

import (
	"bytes"
	"math"
	"strconv"
)

// checkIdentifiers warns of candidate identifiers that look damaged, as spreadsheets
// do it: digits behind the fifteenth become zeros, leading zeros vanish.
func (r *reading) checkIdentifiers(order []int32) {
	var s identifierShape
	s.lengths = map[int]int{}
	s.low = math.Inf(1)
	r.records.runs(order, false, func(run []int32) { s.add(r.records.ids.At(int(run[0]))) })
	name := r.responses.name
	if n := s.rounded; n > 0 && float64(n) > 2*s.expected {
		r.count(identifiersEndInZeros, n, Occurrence{File: name, Column: candidateColumn, Message: plural(n, "identifier") +
			either(n, " of more than 15 digits ends in zeros or is written with an exponent, as after a spreadsheet rounded it;", " of more than 15 digits end in zeros or are written with an exponent, as after a spreadsheet rounded them;") + " different candidates may have become one. Take the identifiers from the source again, as text"})
	}
	if s.numeric < s.all-s.all/10 || len(s.lengths) < 2 || s.dense() {
		return
	}
	mode, shorter := s.mode()
	if mode >= 5 && shorter > 0 && float64(s.lengths[mode]) >= 0.8*float64(s.numeric) {
		r.count(identifiersLostZeros, shorter, Occurrence{File: name, Column: candidateColumn, Message: are(shorter, "identifier") +
			" shorter than the " + strconv.Itoa(mode) + " digits of most, as after a spreadsheet dropped leading zeros; " + either(shorter, "it", "they") + " may not match other files. Take the identifiers from the source again, as text"})
		return
	}
	if s.rounded == 0 {
		r.count(identifiersMixedLength, s.numeric, Occurrence{File: name, Column: candidateColumn, Message: strconv.Itoa(s.numeric) +
			" numeric identifiers have " + strconv.Itoa(len(s.lengths)) + " different lengths; check that no leading zeros or digits were lost"})
	}
}

// count enters a kind with a total and a single occurrence.
func (r *reading) count(kind string, n int, o Occurrence) {
	k := r.problems.kind(kind)
	k.Count += n
	k.Occurrences = append(k.Occurrences, o)
}

// identifierShape describes a set of distinct identifiers.
type identifierShape struct {
	all, numeric int
	rounded      int     // with zeros behind the fifteenth digit, or an exponent
	expected     float64 // of those with such zeros, how many chance gives
	lengths      map[int]int
	low, high    float64
}

func (s *identifierShape) add(id []byte) {
	s.all++
	if !digits(id) {
		if exponent(id) {
			s.rounded++
		}
		return
	}
	s.numeric++
	s.lengths[len(id)]++
	x, _ := strconv.ParseFloat(string(id), 64)
	s.low, s.high = min(s.low, x), max(s.high, x)
	if len(id) > 15 {
		s.expected += math.Pow(10, float64(15-len(id)))
		if len(bytes.Trim(id[15:], "0")) == 0 {
			s.rounded++
		}
	}
}

func digits(id []byte) bool {
	for _, c := range id {
		if c < '0' || c > '9' {
			return false
		}
	}
	return len(id) > 0
}

// exponent reports whether an identifier is a number such as 1.23457E+15.
func exponent(id []byte) bool {
	at := bytes.IndexAny(id, "eE")
	if at < 0 {
		return false
	}
	power := bytes.TrimPrefix(id[at+1:], []byte("+"))
	whole, part, dot := bytes.Cut(id[:at], []byte("."))
	return len(whole) == 1 && digits(whole) && (!dot || digits(part)) && len(power) == 2 && digits(power)
}

// dense reports whether the identifiers fill at least half of their range, as a
// running number does.
func (s *identifierShape) dense() bool {
	return 2*float64(s.numeric) >= s.high-s.low+1
}

// mode returns the commonest length, the longest of several, and how many
// identifiers are shorter.
func (s *identifierShape) mode() (length, shorter int) {
	for l, n := range s.lengths {
		if n > s.lengths[length] || n == s.lengths[length] && l > length {
			length = l
		}
	}
	for l, n := range s.lengths {
		if l < length {
			shorter += n
		}
	}
	return length, shorter
}
