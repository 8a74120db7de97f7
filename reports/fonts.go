package reports

import (
	"bytes"
	"encoding/binary"
	"sync"
	"unicode"

	"github.com/go-fonts/dejavu/dejavusans"
	"github.com/go-fonts/dejavu/dejavusansbold"
	"github.com/jung-kurt/gofpdf"
)

const fontFamily = "report"

// addFonts embeds the regular and the bold face. The PDF writer gets copies, because
// the font bytes are shared by every report of the process.
func addFonts(pdf *gofpdf.Fpdf) {
	pdf.AddUTF8FontFromBytes(fontFamily, "", bytes.Clone(dejavusans.TTF))
	pdf.AddUTF8FontFromBytes(fontFamily, "B", bytes.Clone(dejavusansbold.TTF))
}

// covered returns the characters that both faces can print, as a bit per code point
// of the Basic Multilingual Plane.
var covered = sync.OnceValue(func() *coverage {
	regular, bold := glyphs(dejavusans.TTF), glyphs(dejavusansbold.TTF)
	for i := range regular {
		regular[i] &= bold[i]
	}
	return regular
})

// coverage is a set of code points up to U+FFFF.
type coverage [1 << 10]uint64

func (c *coverage) has(r rune) bool {
	return r >= 0 && r <= 0xFFFF && c[r>>6]&(1<<(r&63)) != 0
}

// unshaped are scripts whose letters the fonts may hold but which need right-to-left
// order or joined shapes that the PDF writer does not know: they would be printed
// wrongly rather than not at all.
var unshaped = []*unicode.RangeTable{
	unicode.Hebrew, unicode.Arabic, unicode.Syriac, unicode.Thaana, unicode.Nko,
	unicode.Devanagari, unicode.Bengali, unicode.Tamil, unicode.Thai, unicode.Lao, unicode.Khmer, unicode.Myanmar,
}

// glyphs returns the code points that the character map of a TrueType font sends to a
// glyph, read from its Unicode subtable of format 4 (OpenType specification, table
// cmap). A font without such a subtable covers nothing.
func glyphs(font []byte) *coverage {
	set := &coverage{}
	u16 := func(b []byte, at int) int { return int(binary.BigEndian.Uint16(b[at:])) }
	u32 := func(b []byte, at int) int { return int(binary.BigEndian.Uint32(b[at:])) }
	var cmap []byte
	for i := range u16(font, 4) {
		entry := font[12+16*i:]
		if string(entry[:4]) == "cmap" {
			cmap = font[u32(entry, 8):][:u32(entry, 12)]
		}
	}
	if cmap == nil {
		return set
	}
	for i := range u16(cmap, 2) {
		platform, encoding, at := u16(cmap, 4+8*i), u16(cmap, 6+8*i), u32(cmap, 8+8*i)
		if !(platform == 0 || platform == 3 && encoding == 1) || u16(cmap, at) != 4 {
			continue
		}
		table := cmap[at:]
		segments := u16(table, 6) / 2
		ends, starts := 14, 16+2*segments
		deltas, offsets := starts+2*segments, starts+4*segments
		for s := range segments {
			from, to := u16(table, starts+2*s), u16(table, ends+2*s)
			delta, offset := u16(table, deltas+2*s), u16(table, offsets+2*s)
			for c := from; c <= to && c < 0xFFFF; c++ {
				glyph := c
				if offset != 0 {
					glyph = u16(table, offsets+2*s+offset+2*(c-from))
				}
				if offset == 0 || glyph != 0 {
					glyph = (glyph + delta) & 0xFFFF
				}
				if glyph != 0 {
					set[c>>6] |= 1 << (c & 63)
				}
			}
		}
	}
	return set
}
