package intake

import (
	"bufio"
	"bytes"
	"compress/gzip"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"hash"
	"io"
)

// Limits of what is read. Variables, so that tests can lower them.
var (
	maxUnpacked      int64 = 8 << 30  // bytes a gzip file may unpack to
	maxRatio         int64 = 200      // unpacked bytes per received byte
	ratioFrom        int64 = 16 << 20 // unpacked bytes from which maxRatio counts
	maxRecord        int64 = 1 << 20  // bytes of one record
	readBlock              = 256 << 10
	errRecordTooLong       = &fault{endlessLine, "no end of a record within 1 MiB; check for an unclosed quotation mark and that the file is a text table"}
)

// fault is a structural failure of a file: reading further makes no sense.
type fault struct{ kind, message string }

func (f *fault) Error() string { return f.message }

// received passes on the bytes of a file as they come and hashes them.
type received struct {
	r     io.Reader
	hash  hash.Hash
	bytes int64
	err   error // what ended the file, nil or io.EOF where it was read well
}

func (r *received) Read(b []byte) (int, error) {
	n, err := r.r.Read(b)
	r.hash.Write(b[:n])
	r.bytes += int64(n)
	if err != nil {
		r.err = err
	}
	return n, err
}

// text delivers the text of a file, unpacked where it is gzip, without a byte order
// mark, and stops at what is no text.
type text struct {
	name      string
	raw       *received
	source    io.Reader // raw, or the unpacked bytes
	packed    bool
	delivered int64 // bytes handed out
	recordAt  int64 // where the record being read starts, by the same count
	err       error
	lines     *bufio.Reader // over this text
}

// openText looks at the first bytes of a file and prepares to read it.
func openText(f *File) (*text, error) {
	t := &text{name: f.Name, raw: &received{r: f.Reader, hash: sha256.New()}}
	front := bufio.NewReaderSize(t.raw, readBlock)
	t.source = front
	if magic, _ := front.Peek(2); bytes.Equal(magic, []byte{0x1f, 0x8b}) {
		unpacked, err := gzip.NewReader(front)
		if err != nil {
			return nil, t.gzipFault(err)
		}
		front = bufio.NewReaderSize(unpacked, readBlock)
		t.source, t.packed = front, true
	}
	first, err := front.Peek(8)
	if err != nil && err != io.EOF {
		if t.packed {
			err = t.gzipFault(err)
		}
		return nil, err
	}
	if len(first) == 0 {
		return nil, &fault{emptyFile, "the file is empty; it needs a header row and data rows"}
	}
	if err := recognize(first); err != nil {
		return nil, err
	}
	t.lines = bufio.NewReaderSize(t, readBlock)
	if bytes.HasPrefix(first, []byte{0xEF, 0xBB, 0xBF}) {
		t.lines.Discard(3)
		if len(first) == 3 {
			return nil, &fault{emptyFile, "the file is empty; it needs a header row and data rows"}
		}
	}
	return t, nil
}

// signatures are first bytes of files that are no text tables, and what to do with them.
var signatures = []struct{ prefix, kind, message string }{
	{"\xFF\xFE", badEncoding, "the text is UTF-16; save it as UTF-8"},
	{"\xFE\xFF", badEncoding, "the text is UTF-16; save it as UTF-8"},
	{"PK\x03\x04", binaryContent, "this is a spreadsheet workbook or a zip archive; save the sheet as CSV in UTF-8, or unpack the archive"},
	{"\xD0\xCF\x11\xE0", binaryContent, "this is a spreadsheet workbook or another office document; save the sheet as CSV in UTF-8"},
	{"%PDF-", binaryContent, "this is a PDF document; export the table as CSV in UTF-8"},
	{"PAR1", binaryContent, "this is a Parquet file; export the table as CSV in UTF-8"},
	{"\x1F\x8B", binaryContent, "the file is packed twice; unpack it once"},
	{"BZh", binaryContent, "this is packed with bzip2; unpack it or pack it with gzip"},
	{"\xFD7zXZ", binaryContent, "this is packed with xz; unpack it or pack it with gzip"},
	{"\x28\xB5\x2F\xFD", binaryContent, "this is packed with zstd; unpack it or pack it with gzip"},
}

func recognize(first []byte) error {
	for _, s := range signatures {
		if bytes.HasPrefix(first, []byte(s.prefix)) {
			return &fault{s.kind, s.message}
		}
	}
	return nil
}

// Read delivers text and ends with a *fault where the content cannot be a table.
func (t *text) Read(b []byte) (int, error) {
	if t.err != nil {
		return 0, t.err
	}
	if t.delivered-t.recordAt > maxRecord+int64(readBlock) {
		t.err = errRecordTooLong
		return 0, t.err
	}
	n, err := t.source.Read(b)
	t.delivered += int64(n)
	switch {
	case bytes.IndexByte(b[:n], 0) >= 0:
		err = &fault{binaryContent, "the content holds zero bytes, so it is not UTF-8 text; save the table as CSV in UTF-8"}
	case t.packed && t.delivered > maxUnpacked:
		err = &fault{gzipTooLarge, fmt.Sprintf("the file unpacks to more than %d MiB; split it", maxUnpacked>>20)}
	case t.packed && t.delivered > ratioFrom && t.delivered/maxRatio > t.raw.bytes:
		err = &fault{gzipRatio, fmt.Sprintf("the file unpacks to more than %d times its size, which no table of answers does; check it, or send it unpacked", maxRatio)}
	case err != nil && err != io.EOF && t.packed:
		err = t.gzipFault(err)
	}
	if err != nil {
		t.err = err
		if _, broken := err.(*fault); broken {
			return 0, err
		}
	}
	return n, err
}

// gzipFault tells a damaged gzip file from a failure of reading it.
func (t *text) gzipFault(err error) error {
	if t.raw.err != nil && t.raw.err != io.EOF {
		return t.raw.err
	}
	return &fault{unreadableGzip, "the file starts as gzip and cannot be unpacked to its end: it is cut off or damaged; send it again"}
}

// sha256 returns the digest of the bytes received, in hexadecimal.
func (t *text) sha256() string { return hex.EncodeToString(t.raw.hash.Sum(nil)) }
