package logbook

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"io/fs"
	"slices"

	"github.com/klauspost/compress/zstd"
)

// index says what stands where in a sealed and sound segment. It is derived
// from the segment, kept beside it, and made anew where it is missing or does
// not fit.
//
// Its file is three lines: this, the blocks, and the CRC-32C of both.
type index struct {
	Packed   bool   `json:"packed"`
	FileSize int64  `json:"file_size"` // of the segment as it lies on the disk
	LastCRC  string `json:"last_crc"`
	All      block  `json:"all"` // the blocks as one

	blocks []block
	text   []byte // of blocks, where they were not yet parsed
}

// block is a stretch of whole lines, at most maxLine bytes of them. The
// segment line is in the first block, the seal in the last.
type block struct {
	At        int64    `json:"at"` // in the segment, decompressed
	Size      int64    `json:"size"`
	Frame     int64    `json:"frame,omitempty"` // in the packed file
	FrameSize int64    `json:"frame_size,omitempty"`
	Skip      int64    `json:"skip,omitempty"` // bytes of the segment line
	After     uint64   `json:"after_seq"`      // record in front of it
	AfterCRC  string   `json:"after_crc"`
	Last      uint64   `json:"last_seq"`
	Records   uint64   `json:"records"`
	From      string   `json:"from"` // least and greatest t
	To        string   `json:"to"`
	Kinds     []string `json:"kinds"`
}

// blockSize is how many bytes of lines go to a block of a plain segment and to
// a frame of a packed one: less means less to read for one record, more means
// better compression.
const blockSize = 256 << 10

// mayHold reports whether the block can hold a record that m wants.
func (b *block) mayHold(m *matcher) bool {
	if b.Last <= m.After || m.from != "" && b.To < m.from || m.to != "" && b.From >= m.to {
		return false
	}
	return len(m.Kinds) == 0 || slices.ContainsFunc(m.Kinds, func(k string) bool { return slices.Contains(b.Kinds, k) })
}

// makeIndex walks over the whole segment; ok is false where it is not sealed
// or not sound.
func makeIndex(d disk, s segmentFile) (x index, ok bool) {
	r, err := openSegment(d, s)
	if err != nil {
		return x, false
	}
	defer r.Close()
	w := newWalker(r, s.name)
	h, damage := w.begin()
	if damage != nil || len(h.AfterCRC) != len(digits{}) {
		return x, false
	}
	x = index{Packed: s.packed}
	last := digits([]byte(h.AfterCRC))
	b := gauge{block: block{Skip: w.offset, After: h.AfterSeq, AfterCRC: h.AfterCRC, Last: h.AfterSeq}}
	all := b
	for {
		l, damage, more := w.next()
		if !more {
			break
		}
		if damage != nil {
			return x, false
		}
		if w.offset-b.At > blockSize && w.at > b.At {
			x.blocks = append(x.blocks, b.done())
			b = gauge{block: block{At: w.at, After: all.Last, AfterCRC: string(last[:]), Last: all.Last}}
		}
		if b.Size = w.offset - b.At; w.sealed {
			continue
		}
		b.add(&l)
		all.add(&l)
		last = l.crc
	}
	if !w.sealed {
		return x, false
	}
	x.blocks = append(x.blocks, b.done())
	x.All, x.LastCRC = all.done(), string(last[:])
	f, err := d.open(s.name)
	if err != nil {
		return x, false
	}
	defer f.Close()
	if x.FileSize, err = f.Size(); err != nil {
		return x, false
	}
	return x, !s.packed || x.placeFrames(f) == nil
}

// gauge widens a block line by line, without a string for each.
type gauge struct {
	block
	from, to [stampSize]byte
	any      bool
}

func (g *gauge) add(l *line) {
	if !g.any || bytes.Compare(l.t, g.from[:]) < 0 {
		copy(g.from[:], l.t)
	}
	if bytes.Compare(l.t, g.to[:]) > 0 {
		copy(g.to[:], l.t)
	}
	g.Last, g.any = l.seq, true
	g.Records++
	for _, k := range g.Kinds {
		if k == string(l.kind) {
			return
		}
	}
	g.Kinds = append(g.Kinds, string(l.kind))
}

// done returns the block with its times as text.
func (g *gauge) done() block {
	if g.any {
		g.From, g.To = string(g.from[:]), string(g.to[:])
	}
	return g.block
}

// placeFrames notes where in a packed file the frame of each block is.
func (x *index) placeFrames(f file) error {
	at := int64(0)
	for i := range x.blocks {
		size, content, err := frameSize(f, at)
		if err != nil {
			return err
		}
		b := &x.blocks[i]
		if content != b.Size {
			return fmt.Errorf("frame at byte %d holds %d bytes, expected %d", at, content, b.Size)
		}
		b.Frame, b.FrameSize = at, size
		at += size
	}
	return nil
}

// frameSize returns the size of the Zstandard frame at offset at, and of its
// content. RFC 8878, section 3.1.1: magic number, frame header, blocks of a
// three-byte header each, checksum.
func frameSize(r io.ReaderAt, at int64) (size, content int64, err error) {
	head := make([]byte, zstd.HeaderMaxSize)
	n, err := r.ReadAt(head, at)
	if err != nil && !errors.Is(err, io.EOF) {
		return 0, 0, err
	}
	var h zstd.Header
	if err := h.Decode(head[:n]); err != nil {
		return 0, 0, fmt.Errorf("frame at byte %d: %w", at, err)
	}
	if !h.HasFCS {
		return 0, 0, fmt.Errorf("frame at byte %d does not say how much it holds", at)
	}
	size = int64(h.HeaderSize)
	for last := false; !last; {
		var b [3]byte
		if _, err := r.ReadAt(b[:], at+size); err != nil {
			return 0, 0, fmt.Errorf("frame at byte %d: %w", at, err)
		}
		v := int64(b[0]) | int64(b[1])<<8 | int64(b[2])<<16
		last = v&1 == 1
		const runLength = 1
		if size += 3 + v>>3; v>>1&3 == runLength {
			size += 1 - v>>3
		}
	}
	if h.HasCheckSum {
		size += 4
	}
	return size, int64(h.FrameContentSize), nil
}

// loadIndex returns the index kept beside s where it fits.
func loadIndex(d disk, s segmentFile) (x index, ok bool) {
	content, err := readFile(d, segmentName(s.number, indexSuffix))
	if err != nil {
		return x, false
	}
	lines := bytes.SplitAfter(content, []byte{'\n'})
	if len(lines) != 4 || string(lines[2]) != indexSum(content[:len(lines[0])+len(lines[1])]) ||
		json.Unmarshal(lines[0], &x) != nil || x.Packed != s.packed || len(x.LastCRC) != len(digits{}) {
		return x, false
	}
	x.text = lines[1]
	f, err := d.open(s.name)
	if err != nil {
		return x, false
	}
	defer f.Close()
	size, err := f.Size()
	return x, err == nil && size == x.FileSize
}

// expand parses the blocks; it reports whether what they are checked against
// is there.
func (x *index) expand() bool {
	if x.text == nil {
		return true
	}
	if json.Unmarshal(x.text, &x.blocks) != nil {
		return false
	}
	x.text = nil
	for _, b := range x.blocks {
		if len(b.AfterCRC) != len(digits{}) || b.Size < 0 || b.Size > maxLine || b.Skip < 0 || b.FrameSize < 0 || b.FrameSize > 2*maxLine {
			return false
		}
	}
	return true
}

func indexSum(body []byte) string { return fmt.Sprintf("%08x\n", crc32.Checksum(body, castagnoli)) }

// keepIndex writes x beside its segment. A failure does no harm.
func keepIndex(d disk, s segmentFile, x index) error {
	head, err := json.Marshal(x)
	if err != nil {
		return err
	}
	blocks, err := json.Marshal(x.blocks)
	if err != nil {
		return err
	}
	body := slices.Concat(head, []byte{'\n'}, blocks, []byte{'\n'})
	name := segmentName(s.number, indexSuffix)
	part := name + partSuffix
	d.remove(part) // left by one that was cut off
	f, err := d.create(part)
	if err != nil {
		return err
	}
	_, err = f.WriteAt(append(body, indexSum(body)...), 0)
	if err = errors.Join(err, f.Close()); err != nil {
		d.remove(part)
		return err
	}
	return d.rename(part, name)
}

// indexOf returns the index of s, made and kept where it was missing; ok is
// false where s is not sealed or not sound.
func indexOf(d disk, s segmentFile) (x index, ok bool) {
	if x, ok = loadIndex(d, s); ok {
		return x, true
	}
	if x, ok = makeIndex(d, s); ok {
		// The folder may be read-only: then it is made anew each time.
		_ = keepIndex(d, s, x)
	}
	return x, ok
}

// readFile reads a small file whole.
func readFile(d disk, name string) ([]byte, error) {
	f, err := d.open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	size, err := f.Size()
	if err != nil {
		return nil, err
	}
	if size > 64<<20 {
		return nil, fmt.Errorf("%s: %d bytes: %w", name, size, fs.ErrInvalid)
	}
	return io.ReadAll(io.NewSectionReader(f, 0, size))
}

// blockReader reads the blocks of one segment.
type blockReader struct {
	f      file
	packed bool
	z      *zstd.Decoder
	buf    []byte
}

func openBlocks(d disk, s segmentFile) (*blockReader, error) {
	f, err := d.open(s.name)
	if err != nil {
		return nil, err
	}
	r := &blockReader{f: f, packed: s.packed}
	if s.packed {
		if r.z, err = zstd.NewReader(nil, zstd.WithDecoderConcurrency(1), zstd.WithDecoderMaxMemory(2*maxLine)); err != nil {
			f.Close()
			return nil, err
		}
	}
	return r, nil
}

// lines returns a reader of the lines of b, without the segment line.
func (r *blockReader) lines(b block) (io.Reader, error) {
	if !r.packed {
		return io.NewSectionReader(r.f, b.At+b.Skip, b.Size-b.Skip), nil
	}
	frame := make([]byte, b.FrameSize)
	if _, err := r.f.ReadAt(frame, b.Frame); err != nil && !errors.Is(err, io.EOF) {
		return nil, err
	}
	var err error
	if r.buf, err = r.z.DecodeAll(frame, r.buf[:0]); err != nil {
		return nil, err
	}
	return bytes.NewReader(r.buf[min(b.Skip, int64(len(r.buf))):]), nil
}

func (r *blockReader) Close() {
	if r.z != nil {
		r.z.Close()
	}
	r.f.Close()
}
