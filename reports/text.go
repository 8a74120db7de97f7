package reports

import (
	"strings"
	"unicode"
	"unicode/utf8"
)

// replacement stands for a character that cannot be printed.
const replacement = '□'

// textFilter makes any text printable and remembers what it had to replace. All text
// of a PDF passes through it, because the PDF writer fails on characters beyond U+FFFF
// and prints wrong signs for others without a word.
type textFilter struct {
	altered map[string]bool // texts in which a character was replaced
}

func newTextFilter() *textFilter { return &textFilter{altered: map[string]bool{}} }

// clean returns the text with line breaks and tabs as spaces and every other
// character that the report cannot print as a replacement sign: invalid UTF-8, control
// and invisible format characters, directions, characters without a glyph in both
// faces, and scripts that need shaping.
func (f *textFilter) clean(s string) string {
	if plain(s) {
		return s
	}
	fonts := covered()
	out, replaced := mapText(s, func(r rune) bool {
		return fonts.has(r) && !unicode.In(r, unshaped...)
	})
	if replaced {
		f.altered[s] = true
	}
	return out
}

// plain reports whether the text is printable ASCII, which needs no work.
func plain(s string) bool {
	for i := range len(s) {
		if s[i] < ' ' || s[i] > '~' {
			return false
		}
	}
	return true
}

// mapText turns white space into spaces and replaces what is not printable text or not
// accepted by printable.
func mapText(s string, printable func(rune) bool) (out string, replaced bool) {
	var b strings.Builder
	for len(s) > 0 {
		r, size := utf8.DecodeRuneInString(s)
		switch {
		case r == utf8.RuneError && size == 1, unicode.IsControl(r) && !unicode.IsSpace(r), unicode.Is(unicode.Cf, r):
			b.WriteRune(replacement)
			replaced = true
		case unicode.IsSpace(r):
			b.WriteByte(' ')
		case !printable(r):
			b.WriteRune(replacement)
			replaced = true
		default:
			b.WriteRune(r)
		}
		s = s[size:]
	}
	return b.String(), replaced
}

// terminalText makes text safe for a terminal: no control or direction characters,
// valid UTF-8, one line.
func terminalText(s string) string {
	if plain(s) {
		return s
	}
	out, _ := mapText(s, unicode.IsPrint)
	return out
}

// displayWidth returns the number of terminal columns of the text: none for combining
// marks, two for East Asian wide characters.
func displayWidth(s string) int {
	n := 0
	for _, r := range s {
		n += runeWidth(r)
	}
	return n
}

func runeWidth(r rune) int {
	switch {
	case r < 0x300:
		return 1
	case unicode.In(r, unicode.Mn, unicode.Me):
		return 0
	case r >= 0x1100 && r <= 0x115F, r >= 0x2E80 && r <= 0xA4CF && r != 0x303F, r >= 0xAC00 && r <= 0xD7A3,
		r >= 0xF900 && r <= 0xFAFF, r >= 0xFE30 && r <= 0xFE6F, r >= 0xFF00 && r <= 0xFF60, r >= 0xFFE0 && r <= 0xFFE6,
		r >= 0x1F300 && r <= 0x1FAFF, r >= 0x20000 && r <= 0x3FFFD:
		return 2
	}
	return 1
}

// shorten cuts the text to at most width columns, the last one an ellipsis, with the
// measure given.
func shorten(s string, width float64, measure func(string) float64) string {
	if measure(s) <= width {
		return s
	}
	runes := []rune(s)
	low, high := 0, len(runes) // the longest prefix that fits lies in [low, high)
	for low+1 < high {
		middle := (low + high) / 2
		if measure(string(runes[:middle])+"…") <= width {
			low = middle
		} else {
			high = middle
		}
	}
	return string(runes[:low]) + "…"
}

// shortenMiddle cuts the text to a width and keeps its end as well as its beginning,
// since names of items often differ at the end only.
func shortenMiddle(s string, width float64, measure func(string) float64) string {
	if measure(s) <= width {
		return s
	}
	runes := []rune(s)
	for keep := len(runes) - 1; keep > 1; keep-- {
		keep = min(keep, longestLine)
		t := string(runes[:keep-keep/3]) + "…" + string(runes[len(runes)-keep/3:])
		if measure(t) <= width {
			return t
		}
	}
	return shorten(s, width, measure)
}

// middleRunes cuts the text to a number of characters, keeping beginning and end.
func middleRunes(s string, most int) string {
	return shortenMiddle(s, float64(most), func(t string) float64 { return float64(len([]rune(t))) })
}

// longestLine is more characters than any line holds; it keeps the breaking of long
// texts from measuring all of the rest for every line.
const longestLine = 400

// wrapText breaks the text into lines no wider than width: at spaces, else behind
// punctuation, else anywhere.
func wrapText(s string, width float64, measure func(string) float64) []string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(s) {
		joined := word
		if line != "" {
			joined = line + " " + word
		}
		if len(joined) <= 4*longestLine && measure(joined) <= width {
			line = joined
			continue
		}
		if line != "" {
			lines = append(lines, line)
		}
		for len(word) > 4*longestLine || measure(word) > width {
			cut := breakWord(word, width, measure)
			lines = append(lines, word[:cut])
			word = word[cut:]
		}
		line = word
	}
	if line != "" || len(lines) == 0 {
		lines = append(lines, line)
	}
	return lines
}

// breakWord returns how many bytes of a word too long for a line stand on the line.
func breakWord(word string, width float64, measure func(string) float64) int {
	ends := []int{}
	for i := range word {
		if i > 0 {
			ends = append(ends, i)
		}
		if len(ends) == longestLine {
			break
		}
	}
	if len(ends) < longestLine {
		ends = append(ends, len(word))
	}
	low, high := 0, len(ends) // ends[low] is taken whatever its width
	for low+1 < high {
		middle := (low + high) / 2
		if measure(word[:ends[middle]]) <= width {
			low = middle
		} else {
			high = middle
		}
	}
	for i := low; i > low/2; i-- {
		if strings.ContainsRune("-_./:;,|+", rune(word[ends[i]-1])) {
			return ends[i]
		}
	}
	return ends[low]
}
