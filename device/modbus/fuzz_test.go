package modbus

import (
	"bytes"
	"testing"
)

// The seeds decode (frames_test.go), so that the fuzzer starts inside the
// checksum's door; half of its inputs are sealed for it to stay there.

func FuzzReplyRTU(f *testing.F) {
	for _, c := range replies {
		f.Add(unhex(f, c.frame), false)
		frame := unhex(f, c.frame)
		f.Add(frame[:len(frame)-2], true)
	}
	f.Fuzz(func(t *testing.T, frame []byte, sealed bool) {
		if sealed {
			frame = seal(bytes.Clone(frame), 0)
		}
		ReplySizeRTU(frame)
		got, err := DecodeReplyRTU(frame)
		if err != nil {
			return
		}
		again, err := AppendReplyRTU(nil, got)
		if err != nil || !bytes.Equal(again, frame) {
			t.Fatalf("% X read as %+v, written as % X (%v)", frame, got, again, err)
		}
		if n := ReplySizeRTU(frame); got.Exception == 0 && n != len(frame) {
			t.Fatalf("% X announces %d bytes, has %d", frame, n, len(frame))
		}
	})
}

func FuzzRequestRTU(f *testing.F) {
	for _, c := range requests {
		f.Add(unhex(f, c.frame), false)
		frame := unhex(f, c.frame)
		f.Add(frame[:len(frame)-2], true)
	}
	f.Fuzz(func(t *testing.T, frame []byte, sealed bool) {
		if sealed {
			frame = seal(bytes.Clone(frame), 0)
		}
		got, err := DecodeRequestRTU(frame)
		if err != nil {
			return
		}
		again, err := AppendRequestRTU(nil, got)
		if err != nil || !bytes.Equal(again, frame) {
			t.Fatalf("% X read as %+v, written as % X (%v)", frame, got, again, err)
		}
		if n := RequestSizeRTU(frame); n != len(frame) {
			t.Fatalf("% X announces %d bytes, has %d", frame, n, len(frame))
		}
	})
}

func FuzzTCP(f *testing.F) {
	for i, c := range replies {
		frame, err := AppendReplyTCP(nil, uint16(i), c.want)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(frame)
	}
	f.Add([]byte{}) // an empty frame once got past the check of its length
	f.Fuzz(func(t *testing.T, frame []byte) {
		if transaction, got, err := DecodeReplyTCP(frame); err == nil {
			again, err := AppendReplyTCP(nil, transaction, got)
			if err != nil || !bytes.Equal(again, frame) {
				t.Fatalf("% X read as %+v, written as % X (%v)", frame, got, again, err)
			}
		}
		if transaction, got, err := DecodeRequestTCP(frame); err == nil {
			again, err := AppendRequestTCP(nil, transaction, got)
			if err != nil || !bytes.Equal(again, frame) {
				t.Fatalf("% X read as %+v, written as % X (%v)", frame, got, again, err)
			}
		}
	})
}
