package logbook

import (
	"context"
	"crypto/sha256"
	"errors"
	"fmt"
	"io"

	"github.com/klauspost/compress/zstd"
)

const partSuffix = ".part"

// pack compresses a sealed and sound segment, reads it back, and only then
// takes the plain one away. It may be cut off anywhere and done again.
func pack(ctx context.Context, d disk, s segmentFile) error {
	x, ok := makeIndex(d, s)
	if !ok || s.packed {
		return fmt.Errorf("%s is not a sealed and sound segment", s.name)
	}
	packed := segmentFile{number: s.number, name: segmentName(s.number, packedSuffix), packed: true}
	part := packed.name + partSuffix
	d.remove(part) // left by one that was cut off
	if err := packTo(ctx, d, s, part, &x); err != nil {
		d.remove(part)
		return err
	}
	same, err := sameContent(d, s, segmentFile{name: part, packed: true})
	if err != nil || !same {
		d.remove(part)
		return errors.Join(err, fmt.Errorf("%s: compressed, it does not read back the same", s.name))
	}
	if err := d.rename(part, packed.name); err != nil {
		return err
	}
	if err := d.syncDir(""); err != nil {
		return err
	}
	if err := keepIndex(d, packed, x); err != nil {
		return err
	}
	return d.remove(s.name)
}

// packTo writes the blocks of s as frames to the file name, and notes in x
// where they are.
func packTo(ctx context.Context, d disk, s segmentFile, name string, x *index) error {
	src, err := d.open(s.name)
	if err != nil {
		return err
	}
	defer src.Close()
	z, err := zstd.NewWriter(nil, zstd.WithEncoderConcurrency(1), zstd.WithSingleSegment(true))
	if err != nil {
		return err
	}
	defer z.Close()
	dst, err := d.create(name)
	if err != nil {
		return err
	}
	defer dst.Close()
	var plain, frame []byte
	x.Packed, x.FileSize = true, 0
	for i := range x.blocks {
		if err := ctx.Err(); err != nil {
			return err
		}
		b := &x.blocks[i]
		if plain = append(plain[:0], make([]byte, b.Size)...); b.Size == 0 {
			continue
		}
		if _, err := src.ReadAt(plain, b.At); err != nil && !errors.Is(err, io.EOF) {
			return err
		}
		frame = z.EncodeAll(plain, frame[:0])
		if _, err := dst.WriteAt(frame, x.FileSize); err != nil {
			return err
		}
		b.Frame, b.FrameSize = x.FileSize, int64(len(frame))
		x.FileSize += b.FrameSize
	}
	return dst.Sync()
}

// sameContent compares two segments by digest.
func sameContent(d disk, a, b segmentFile) (bool, error) {
	var sums [2][sha256.Size]byte
	for i, s := range []segmentFile{a, b} {
		r, err := openSegment(d, s)
		if err != nil {
			return false, err
		}
		h := sha256.New()
		_, err = io.Copy(h, r)
		r.Close()
		if err != nil {
			return false, err
		}
		h.Sum(sums[i][:0])
	}
	return sums[0] == sums[1], nil
}

// tidy makes the indexes of sealed segments, and compresses them where that is
// wanted, until ctx ends. It begins with what earlier programs left. Its
// failures do no harm: readers make the index themselves, and a plain segment
// stays as it is.
func tidy(ctx context.Context, d disk, compress bool, sealed <-chan segmentFile) {
	one := func(s segmentFile) {
		if compress && !s.packed {
			_ = pack(ctx, d, s)
		} else {
			_, _ = indexOf(d, s)
		}
	}
	if c, err := listContents(d); err == nil {
		for i, s := range c.segments {
			if ctx.Err() != nil {
				return
			}
			if i+1 < len(c.segments) { // the last one may be the one being written
				one(s)
			}
		}
	}
	for {
		select {
		case <-ctx.Done():
			return
		case s := <-sealed:
			one(s)
		}
	}
}
