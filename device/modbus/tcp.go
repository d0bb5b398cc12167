package modbus

import (
	"encoding/binary"
	"fmt"
)

// MaxTCP is the longest frame over TCP in bytes (V1.0b, section 4.1).
const MaxTCP = 260

const headerTCP = 7 // transaction, protocol, length, unit

// AppendRequestTCP appends the frame of r to dst. The reply will carry the
// same transaction number.
func AppendRequestTCP(dst []byte, transaction uint16, r Request) ([]byte, error) {
	start := len(dst)
	out, err := appendRequest(header(dst, transaction, r.Unit), r)
	if err != nil {
		return dst, err
	}
	return measure(out, start), nil
}

// AppendReplyTCP appends the frame of r to dst.
func AppendReplyTCP(dst []byte, transaction uint16, r Reply) ([]byte, error) {
	start := len(dst)
	out, err := appendReply(header(dst, transaction, r.Unit), r)
	if err != nil {
		return dst, err
	}
	return measure(out, start), nil
}

// DecodeRequestTCP reads one whole frame.
func DecodeRequestTCP(frame []byte) (transaction uint16, r Request, err error) {
	if err := checkTCP(frame); err != nil {
		return 0, Request{}, err
	}
	r, err = decodeRequest(frame[6], frame[headerTCP:])
	return binary.BigEndian.Uint16(frame), r, err
}

// DecodeReplyTCP reads one whole frame.
func DecodeReplyTCP(frame []byte) (transaction uint16, r Reply, err error) {
	if err := checkTCP(frame); err != nil {
		return 0, Reply{}, err
	}
	r, err = decodeReply(frame[6], frame[headerTCP:])
	return binary.BigEndian.Uint16(frame), r, err
}

// SizeTCP returns how many bytes the frame has that begins with head, 0 where
// more of the head must be seen, or -1 where no frame begins so; the stream
// is then lost and must be opened anew.
func SizeTCP(head []byte) int {
	if len(head) < 6 {
		return 0
	}
	n := int(binary.BigEndian.Uint16(head[4:]))
	if head[2] != 0 || head[3] != 0 || n < 3 || 6+n > MaxTCP {
		return -1
	}
	return 6 + n
}

func header(dst []byte, transaction uint16, unit byte) []byte {
	return append(binary.BigEndian.AppendUint16(dst, transaction), 0, 0, 0, 0, unit)
}

func measure(frame []byte, start int) []byte {
	binary.BigEndian.PutUint16(frame[start+4:], uint16(len(frame)-start-6))
	return frame
}

func checkTCP(frame []byte) error {
	if size := SizeTCP(frame); size <= 0 || size != len(frame) {
		return fmt.Errorf("frame % X of %d bytes, its header says %d: %w", clip(frame), len(frame), size, ErrFrame)
	}
	return nil
}
