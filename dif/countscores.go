package dif

import "math/bits"

// scoreRows sets level[i] to the number of bits of row i that are in mask, for
// rows of len(mask) words.
func scoreRows(level []int32, rows []uint64, mask []uint64) {
	words := len(mask)
	switch words {
	case 1:
		for i, w := range rows[:len(level)] {
			level[i] = int32(bits.OnesCount64(w & mask[0]))
		}
	case 2:
		mask0, mask1 := mask[0], mask[1]
		for i := range level {
			row := rows[2*i : 2*i+2]
			level[i] = int32(bits.OnesCount64(row[0]&mask0) + bits.OnesCount64(row[1]&mask1))
		}
	default:
		clear(level)
		k := 0
		for ; k+4 <= words; k += 4 {
			addScores4(level, rows[k:], words, [4]uint64(mask[k:]))
		}
		switch words - k {
		case 3:
			addScores3(level, rows[k:], words, [3]uint64(mask[k:]))
		case 2:
			addScores2(level, rows[k:], words, [2]uint64(mask[k:]))
		case 1:
			addScores1(level, rows[k:], words, mask[k])
		}
	}
}

// The addScores functions add to level[i] the number of bits of one to four
// words of row i that are in mask. Rows are stride words apart; rows begins with
// the first word to look at.

func addScores4(level []int32, rows []uint64, stride int, mask [4]uint64) {
	m0, m1, m2, m3 := mask[0], mask[1], mask[2], mask[3]
	j := 0
	for i := range level {
		level[i] += int32(bits.OnesCount64(rows[j]&m0) + bits.OnesCount64(rows[j+1]&m1) +
			bits.OnesCount64(rows[j+2]&m2) + bits.OnesCount64(rows[j+3]&m3))
		j += stride
	}
}

func addScores3(level []int32, rows []uint64, stride int, mask [3]uint64) {
	m0, m1, m2 := mask[0], mask[1], mask[2]
	j := 0
	for i := range level {
		level[i] += int32(bits.OnesCount64(rows[j]&m0) + bits.OnesCount64(rows[j+1]&m1) + bits.OnesCount64(rows[j+2]&m2))
		j += stride
	}
}

func addScores2(level []int32, rows []uint64, stride int, mask [2]uint64) {
	m0, m1 := mask[0], mask[1]
	j := 0
	for i := range level {
		level[i] += int32(bits.OnesCount64(rows[j]&m0) + bits.OnesCount64(rows[j+1]&m1))
		j += stride
	}
}

func addScores1(level []int32, rows []uint64, stride int, mask uint64) {
	j := 0
	for i := range level {
		level[i] += int32(bits.OnesCount64(rows[j] & mask))
		j += stride
	}
}
