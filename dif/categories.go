package dif

// categories fills out with the candidates of one level by score on the item whose
// planes are first..first+width-1, and returns their number. Planes count candidates
// with a score of at least k, so categories are differences of neighbouring planes.
func (t *levelCounts) categories(level, first, width int, out []uint32) uint32 {
	n := t.answered(level, first)
	at := level*t.planes + first
	above := n
	for k := range width {
		reached := t.right[at+k]
		out[k] = above - reached
		above = reached
	}
	out[width] = above
	return n
}
