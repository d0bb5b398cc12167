package modbus

import (
	"encoding/binary"
	"fmt"
	"time"
)

// MaxRTU is the longest RTU frame in bytes (V1.02, section 2.2).
const MaxRTU = 256

// AppendRequestRTU appends the frame of r to dst.
func AppendRequestRTU(dst []byte, r Request) ([]byte, error) {
	start := len(dst)
	out, err := appendRequest(append(dst, r.Unit), r)
	if err != nil {
		return dst, err
	}
	return seal(out, start), nil
}

// AppendReplyRTU appends the frame of r to dst.
func AppendReplyRTU(dst []byte, r Reply) ([]byte, error) {
	start := len(dst)
	out, err := appendReply(append(dst, r.Unit), r)
	if err != nil {
		return dst, err
	}
	return seal(out, start), nil
}

// DecodeRequestRTU reads one whole frame.
func DecodeRequestRTU(frame []byte) (Request, error) {
	if err := checkRTU(frame); err != nil {
		return Request{}, err
	}
	return decodeRequest(frame[0], frame[1:len(frame)-2])
}

// DecodeReplyRTU reads one whole frame.
func DecodeReplyRTU(frame []byte) (Reply, error) {
	if err := checkRTU(frame); err != nil {
		return Reply{}, err
	}
	return decodeReply(frame[0], frame[1:len(frame)-2])
}

// RequestSizeRTU returns how many bytes the request has that begins with
// head, 0 where more of the head must be seen, or -1 where no request of a
// known function begins so.
func RequestSizeRTU(head []byte) int {
	if len(head) < 2 {
		return 0
	}
	switch Function(head[1]) {
	case ReadHolding, ReadInput, WriteSingle:
		return 8
	case WriteMultiple:
		if len(head) < 7 {
			return 0
		}
		if n := int(head[6]); n >= 2 && n%2 == 0 && n <= 2*MaxWrite {
			return 9 + n
		}
	}
	return -1
}

// ReplySizeRTU returns how many bytes the reply has that begins with head, 0
// where more of the head must be seen, or -1 where no reply of a known
// function begins so.
func ReplySizeRTU(head []byte) int {
	if len(head) < 2 {
		return 0
	}
	if head[1]&exceptionBit != 0 {
		return 5
	}
	switch Function(head[1]) {
	case WriteSingle, WriteMultiple:
		return 8
	case ReadHolding, ReadInput:
		if len(head) < 3 {
			return 0
		}
		if n := int(head[2]); n >= 2 && n%2 == 0 && n <= 2*MaxRead {
			return 5 + n
		}
	}
	return -1
}

// Silence returns how long a line must be silent between frames: 3.5
// characters of bits each, or 1.75 ms where the line is faster than 19 200
// bit/s (V1.02, section 2.5.1.1). Bits counts start, data, parity and stop.
func Silence(baud, bits int) time.Duration {
	if baud <= 0 || baud > 19200 {
		return 1750 * time.Microsecond
	}
	return time.Duration(3.5 * float64(bits) / float64(baud) * float64(time.Second))
}

func seal(frame []byte, start int) []byte {
	return binary.LittleEndian.AppendUint16(frame, CRC(frame[start:]))
}

func checkRTU(frame []byte) error {
	if len(frame) < 5 || len(frame) > MaxRTU {
		return fmt.Errorf("frame of %d bytes: expected 5 to %d: %w", len(frame), MaxRTU, ErrFrame)
	}
	body := frame[:len(frame)-2]
	got, want := binary.LittleEndian.Uint16(frame[len(body):]), CRC(body)
	if got != want {
		return fmt.Errorf("frame % X: CRC %04X, computed %04X: %w", clip(frame), got, want, ErrFrame)
	}
	return nil
}

func clip(p []byte) []byte { return p[:min(len(p), 16)] }
