package logbook

import (
	"cmp"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"

	"github.com/klauspost/compress/zstd"
)

const (
	plainSuffix  = ".jsonl"
	packedSuffix = ".jsonl.zst"
	indexSuffix  = ".index"
	tornSuffix   = ".torn"
	spectraDir   = "spectra"
)

// derived are the suffixes of files that may be deleted.
var derived = []string{indexSuffix, indexSuffix + partSuffix, packedSuffix + partSuffix}

// segmentName returns the name of segment number with the suffix.
func segmentName(number int, suffix string) string { return fmt.Sprintf("%06d%s", number, suffix) }

// segmentFile is a segment as its name tells.
type segmentFile struct {
	number int
	name   string
	packed bool
}

// contents is what a logbook's folder holds, by the names in it.
type contents struct {
	segments []segmentFile // ascending; plain before packed where both are there
	torn     []string      // set aside after a crash
	foreign  []string      // ascending
}

func listContents(d disk) (c contents, err error) {
	names, err := d.list()
	if err != nil {
		return c, err
	}
	slices.Sort(names)
	for _, name := range names {
		digits, suffix, _ := strings.Cut(name, ".")
		number, err := strconv.Atoi(digits)
		numbered := err == nil && number > 0 && strings.HasPrefix(name, segmentName(number, "."))
		switch suffix = "." + suffix; {
		case numbered && (suffix == plainSuffix || suffix == packedSuffix):
			c.segments = append(c.segments, segmentFile{number, name, suffix == packedSuffix})
		case numbered && (suffix == tornSuffix || strings.HasPrefix(suffix, tornSuffix+".")):
			c.torn = append(c.torn, name)
		case numbered && slices.Contains(derived, suffix):
		case name == lockName || name == spectraDir+"/":
		default:
			c.foreign = append(c.foreign, name)
		}
	}
	slices.SortStableFunc(c.segments, func(a, b segmentFile) int { return cmp.Compare(a.number, b.number) })
	return c, nil
}

// openSegment opens a segment for reading from its beginning, decompressed.
func openSegment(d disk, s segmentFile) (io.ReadCloser, error) {
	f, err := d.open(s.name)
	if err != nil {
		return nil, err
	}
	size, err := f.Size()
	if err != nil {
		f.Close()
		return nil, err
	}
	r := io.NewSectionReader(f, 0, size)
	if !s.packed {
		return struct {
			io.Reader
			io.Closer
		}{r, f}, nil
	}
	z, err := zstd.NewReader(r, zstd.WithDecoderConcurrency(1), zstd.WithDecoderMaxMemory(64<<20))
	if err != nil {
		f.Close()
		return nil, fmt.Errorf("%s: %w", s.name, err)
	}
	return &unpacker{z, f}, nil
}

// unpacker reads a compressed segment.
type unpacker struct {
	*zstd.Decoder
	f file
}

func (u *unpacker) Close() error {
	u.Decoder.Close()
	return u.f.Close()
}
