package intake

import (
	"bufio"
	"bytes"
)

// delimiter returns the character that separates the fields of the header line: of
// comma, semicolon and tab the one that occurs most often outside quotation marks,
// in this order where they tie. A line without any has one column.
func delimiter(r *bufio.Reader) rune {
	var line []byte
	for size := 4096; ; size *= 4 {
		line, _ = r.Peek(min(size, r.Size()))
		if end := lineEnd(line); end >= 0 {
			line = line[:end]
			break
		}
		if len(line) < size {
			break // the whole file, or as much as the buffer holds
		}
	}
	counts := map[byte]int{}
	inQuotes := false
	for _, c := range line {
		if c == '"' {
			inQuotes = !inQuotes
		} else if !inQuotes {
			counts[c]++
		}
	}
	best := byte(',')
	for _, c := range []byte{';', '\t'} {
		if counts[c] > counts[best] {
			best = c
		}
	}
	return rune(best)
}

// lineEnd returns where the first record that is not empty ends, or -1.
func lineEnd(b []byte) int {
	inQuotes := false
	start := len(b) - len(bytes.TrimLeft(b, "\r\n"))
	for i := start; i < len(b); i++ {
		switch {
		case b[i] == '"':
			inQuotes = !inQuotes
		case b[i] == '\n' && !inQuotes:
			return i
		}
	}
	return -1
}
