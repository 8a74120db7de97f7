package reports

import (
	"strings"
	"testing"
	"unicode"
	"unicode/utf8"
)

func TestCleanReplacesWhatCannotBePrinted(t *testing.T) {
	t.Parallel()
	for _, c := range []struct{ name, in, want string }{
		{"ASCII", "Item 1: a < b", "Item 1: a < b"},
		{"Latin, Greek, Cyrillic, Vietnamese", "Łódź Ωμέγα Задача Tiếng Việt", "Łódź Ωμέγα Задача Tiếng Việt"},
		{"mathematics", "∫ f(x) dx ≤ √2 ∑ ∞ ± −", "∫ f(x) dx ≤ √2 ∑ ∞ ± −"},
		{"beyond U+FFFF", "a😀b𝒳", "a□b□"},
		{"Hebrew and Arabic", "אב ج", "□□ □"},
		{"Chinese", "日本", "□□"},
		{"invalid UTF-8", "a\xff\xfeb", "a□□b"},
		{"half of a surrogate pair", "\xed\xa0\xbd", "□□□"},
		{"controls", "a\x00b\x1b[31m", "a□b□[31m"},
		{"white space", "a\tb\nc\u2028d\u00a0e", "a b c d e"},
		{"directions", "a\u202eb\u2066c", "a□b□c"},
		{"zero width", "a\u200bb\ufeffc", "a□b□c"},
		{"noncharacter", "\uffff", "□"},
		{"empty", "", ""},
	} {
		f := newTextFilter()
		if got := f.clean(c.in); got != c.want {
			t.Errorf("%s: clean(%q) = %q, want %q", c.name, c.in, got, c.want)
		}
		if got, want := len(f.altered) > 0, strings.ContainsRune(c.want, replacement); got != want {
			t.Errorf("%s: altered %v, want %v", c.name, got, want)
		}
		if got := f.clean(c.want); got != c.want {
			t.Errorf("%s: clean text changed again to %q", c.name, got)
		}
	}
}

func TestWrapKeepsTextAndWidth(t *testing.T) {
	t.Parallel()
	measure := func(s string) float64 { return float64(len([]rune(s))) }
	for _, text := range []string{
		"", "one", "several words on a line", strings.Repeat("x", 95), "a-" + strings.Repeat("βγ_", 40) + " end", "Ω" + strings.Repeat("Ж", 30),
	} {
		for _, width := range []float64{1, 2, 7, 20} {
			lines := wrapText(text, width, measure)
			if got, want := strings.Join(lines, ""), strings.ReplaceAll(text, " ", ""); strings.ReplaceAll(got, " ", "") != want {
				t.Errorf("width %g: %q became %q", width, text, lines)
			}
			for _, l := range lines {
				if !utf8.ValidString(l) || measure(l) > width {
					t.Errorf("width %g: line %q is too wide or broken inside a character", width, l)
				}
			}
		}
	}
}

func TestShortenMiddleKeepsBothEnds(t *testing.T) {
	t.Parallel()
	got := middleRunes("Item-with-a-rather-long-name-007", 20)
	if len([]rune(got)) > 20 || !strings.HasPrefix(got, "Item-with") || !strings.HasSuffix(got, "007") {
		t.Errorf("got %q", got)
	}
}

func TestDisplayWidth(t *testing.T) {
	t.Parallel()
	for s, want := range map[string]int{"abc": 3, "Việt": 4, "e\u0301": 1, "日本": 4, "😀": 2, "한": 2} {
		if got := displayWidth(s); got != want {
			t.Errorf("displayWidth(%q) = %d, want %d", s, got, want)
		}
	}
}

func FuzzReportText(f *testing.F) {
	for _, s := range []string{"", "plain", "😀", "\xff", "אבג", "\u202e", strings.Repeat("w", 300), "a b\u0301", "\ufffe", "{nb}", "\\()\r"} {
		f.Add(s)
	}
	fonts := covered()
	f.Fuzz(func(t *testing.T, s string) {
		clean := newTextFilter().clean(s)
		for _, r := range clean {
			if r > 0xFFFF || !fonts.has(r) || unicode.IsControl(r) {
				t.Fatalf("clean(%q) lets %U through", s, r)
			}
		}
		if again := newTextFilter().clean(clean); again != clean {
			t.Fatalf("clean(%q) is not stable: %q, then %q", s, clean, again)
		}
		if terminal := terminalText(s); !utf8.ValidString(terminal) || strings.ContainsFunc(terminal, unicode.IsControl) {
			t.Fatalf("terminalText(%q) = %q", s, terminal)
		}
		d := newDocument(s, s, reportOptions.Date, nil)
		d.addPage(false)
		d.paragraph(s, body)
		d.table([]tableColumn{{head: s}, {"n", 20, alignRight}}, [][]tableCell{cells(s, s)}, 7)
		d.bookmark(s, 0)
		if _, err := d.bytes(); err != nil {
			t.Fatalf("write %q: %v", s, err)
		}
		if cell := harmless(s); strings.HasPrefix(strings.TrimLeft(cell, " "), "=") {
			t.Fatalf("harmless(%q) = %q begins a formula", s, cell)
		}
	})
}
