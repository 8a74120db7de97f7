package intake

import (
	"bytes"

	"difaudit/dif"
)

// blankCode marks an empty cell until it is known what that means. No stored answer has it.
const blankCode = 0xFF

// missingCodes returns the answer code of every declared code of missing answers.
func missingCodes(rule dif.MissingRule) map[string]byte {
	codes := map[string]byte{}
	for _, kind := range []struct {
		codes []string
		code  byte
	}{
		{rule.NotPresented, dif.CodeNotPresented}, {rule.Omitted, dif.CodeOmitted}, {rule.NotReached, dif.CodeNotReached},
		{rule.Invalid, dif.CodeInvalid}, {rule.Technical, dif.CodeTechnical},
	} {
		for _, c := range kind.codes {
			codes[c] = kind.code
		}
	}
	return codes
}

// answered reports whether a code says that the candidate got as far as the item: a
// score, a choice, an omission or an invalid answer.
func answered(code byte) bool {
	return code <= dif.MaxCode || code == dif.CodeOmitted || code == dif.CodeInvalid
}

// fillBlanks gives every empty cell of a row its meaning. order lists the items of
// the row in order of presentation.
func fillBlanks(row []byte, order []int, empty string) {
	if bytes.IndexByte(row, blankCode) < 0 {
		return
	}
	later := false
	for k := len(order) - 1; k >= 0; k-- {
		i := order[k]
		if row[i] != blankCode {
			later = later || answered(row[i])
			continue
		}
		switch {
		case empty == dif.EmptyNotPresented:
			row[i] = dif.CodeNotPresented
		case empty == dif.EmptyOmitted || later:
			row[i] = dif.CodeOmitted
		default:
			row[i] = dif.CodeNotReached
		}
	}
}
