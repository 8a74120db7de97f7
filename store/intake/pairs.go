package intake

// pairRows is the number of records of one block of pairs.
const pairRows = 256

// maxCells bounds the answers held, candidates times items.
var maxCells int64 = 4 << 30

// pairs holds answers that come in any order, in blocks of records that widen with
// the items known. An answer that never came is blankCode.
type pairs struct {
	blocks []pairBlock
	cells  int64
}

type pairBlock struct {
	stride int
	codes  []byte
	given  []uint64 // one bit per code: an answer came, if only an empty one
}

// put stores an answer. Where one came before it returns that and leaves it. known is
// the number of items so far; full means that there is no room for more.
func (p *pairs) put(record, slot, known int, code byte) (before byte, twice, full bool) {
	for record/pairRows >= len(p.blocks) {
		p.blocks = append(p.blocks, pairBlock{})
	}
	b := &p.blocks[record/pairRows]
	if slot >= b.stride {
		stride := max(known, slot+1, b.stride+b.stride/2)
		p.cells += int64(stride-b.stride) * pairRows
		if p.cells > maxCells {
			return 0, false, true
		}
		b.widen(stride)
	}
	at := (record%pairRows)*b.stride + slot
	if b.given[at/64]&(1<<(at%64)) != 0 {
		return b.codes[at], true, false
	}
	b.given[at/64] |= 1 << (at % 64)
	b.codes[at] = code
	return 0, false, false
}

// widen gives the block room for more items.
func (b *pairBlock) widen(stride int) {
	wide := pairBlock{stride: stride, codes: make([]byte, stride*pairRows), given: make([]uint64, stride*pairRows/64)}
	for i := range wide.codes {
		wide.codes[i] = blankCode
	}
	for i := 0; b.stride > 0 && i < pairRows; i++ {
		copy(wide.codes[i*stride:], b.codes[i*b.stride:(i+1)*b.stride])
		for slot := range b.stride {
			if at := i*b.stride + slot; b.given[at/64]&(1<<(at%64)) != 0 {
				to := i*stride + slot
				wide.given[to/64] |= 1 << (to % 64)
			}
		}
	}
	*b = wide
}

// fill writes the answers of a record into a row, slot i to place[i].
func (p *pairs) fill(record int, row []byte, place []int) {
	for i := range row {
		row[i] = blankCode
	}
	if record/pairRows >= len(p.blocks) {
		return
	}
	b := &p.blocks[record/pairRows]
	for slot, to := range place {
		if slot < b.stride {
			row[to] = b.codes[(record%pairRows)*b.stride+slot]
		}
	}
}

// release frees the block that ends with the record.
func (p *pairs) release(record int) {
	if record%pairRows == pairRows-1 {
		p.blocks[record/pairRows] = pairBlock{}
	}
}
