package intake

import (
	"bytes"
	"hash/maphash"

	"difaudit/dif"
)

// index finds records by identifier and attempt. It holds four bytes per slot and
// compares with the identifiers themselves.
type index struct {
	seed     maphash.Seed
	ids      *dif.IDs
	attempts []int32
	slots    []int32 // 1 + number of the record; 0: free
}

func newIndex() *index {
	return &index{seed: maphash.MakeSeed(), ids: &dif.IDs{}, slots: make([]int32, 1<<10)}
}

// find returns the number of a record, -1 where it is not known.
func (x *index) find(id []byte, attempt int32) int {
	_, i := x.place(id, attempt)
	return i
}

// add returns the number of a record and whether it is new.
func (x *index) add(id []byte, attempt int32) (int, bool) {
	slot, i := x.place(id, attempt)
	if i >= 0 {
		return i, false
	}
	x.ids.Append(id)
	x.attempts = append(x.attempts, attempt)
	x.slots[slot] = int32(len(x.attempts))
	if 3*len(x.attempts) > 2*len(x.slots) {
		x.grow()
	}
	return len(x.attempts) - 1, true
}

// place returns the slot where a record is or would be, and its number or -1.
func (x *index) place(id []byte, attempt int32) (slot uint64, record int) {
	mask := uint64(len(x.slots) - 1)
	slot = (maphash.Bytes(x.seed, id) + uint64(uint32(attempt))) & mask
	for ; x.slots[slot] != 0; slot = (slot + 1) & mask {
		i := int(x.slots[slot] - 1)
		if x.attempts[i] == attempt && bytes.Equal(x.ids.At(i), id) {
			return slot, i
		}
	}
	return slot, -1
}

func (x *index) grow() {
	x.slots = make([]int32, 2*len(x.slots))
	for i := range x.attempts {
		x.slots[x.free(i)] = int32(i + 1)
	}
}

// free returns the first free slot for a record that has none.
func (x *index) free(i int) uint64 {
	mask := uint64(len(x.slots) - 1)
	slot := (maphash.Bytes(x.seed, x.ids.At(i)) + uint64(uint32(x.attempts[i]))) & mask
	for x.slots[slot] != 0 {
		slot = (slot + 1) & mask
	}
	return slot
}
