package modbus

import (
	"encoding/binary"
	"errors"
	"fmt"
)

// ErrFrame is wrapped by every refusal of bytes.
var ErrFrame = errors.New("not a valid modbus frame")

// ErrMismatch is wrapped where a valid reply belongs to another request.
var ErrMismatch = errors.New("reply to another request")

// Function is a Modbus function code.
type Function byte

const (
	ReadHolding   Function = 0x03
	ReadInput     Function = 0x04
	WriteSingle   Function = 0x06
	WriteMultiple Function = 0x10
)

// Bounds of one message (V1.1b3, sections 6.3, 6.4 and 6.12).
const (
	MaxRead  = 125 // registers in one read
	MaxWrite = 123 // registers in one write
)

const exceptionBit = 0x80

// Request asks a unit to read Count registers from Address on, or to write
// Values there. A write leaves Count 0: the values say how many.
type Request struct {
	Unit     byte
	Function Function
	Address  uint16
	Count    int
	Values   []uint16
}

// Reply is a unit's answer. Values are those of a read, or the one value that
// WriteSingle echoes; Address and Count come back from a write. Where
// Exception is not zero, nothing else is set.
type Reply struct {
	Unit      byte
	Function  Function
	Exception Exception
	Address   uint16
	Count     int
	Values    []uint16
}

// Check reports why r cannot be sent.
func (r Request) Check() error {
	count := r.Count
	switch r.Function {
	case ReadHolding, ReadInput:
		if len(r.Values) != 0 {
			return fmt.Errorf("function %d with %d values: a read carries none", r.Function, len(r.Values))
		}
		if r.Count < 1 || r.Count > MaxRead {
			return fmt.Errorf("read of %d registers: expected 1 to %d", r.Count, MaxRead)
		}
	case WriteSingle:
		if r.Count != 0 || len(r.Values) != 1 {
			return fmt.Errorf("single write with %d values: expected 1", len(r.Values))
		}
		count = 1
	case WriteMultiple:
		if r.Count != 0 || len(r.Values) < 1 || len(r.Values) > MaxWrite {
			return fmt.Errorf("write of %d registers: expected 1 to %d", len(r.Values), MaxWrite)
		}
		count = len(r.Values)
	default:
		return fmt.Errorf("function %d: expected 3, 4, 6 or 16", r.Function)
	}
	if int(r.Address)+count > 1<<16 {
		return fmt.Errorf("registers %d to %d: the last register is 65535", r.Address, int(r.Address)+count-1)
	}
	return nil
}

// appendRequest appends the message of r without unit and framing.
func appendRequest(dst []byte, r Request) ([]byte, error) {
	if err := r.Check(); err != nil {
		return dst, err
	}
	dst = append(dst, byte(r.Function))
	dst = binary.BigEndian.AppendUint16(dst, r.Address)
	switch r.Function {
	case WriteSingle:
		return binary.BigEndian.AppendUint16(dst, r.Values[0]), nil
	case WriteMultiple:
		dst = binary.BigEndian.AppendUint16(dst, uint16(len(r.Values)))
		dst = append(dst, byte(2*len(r.Values)))
		return appendValues(dst, r.Values), nil
	}
	return binary.BigEndian.AppendUint16(dst, uint16(r.Count)), nil
}

// decodeRequest reads the message of a request without unit and framing.
func decodeRequest(unit byte, p []byte) (Request, error) {
	if len(p) < 5 {
		return Request{}, fmt.Errorf("request of %d bytes is too short: %w", len(p), ErrFrame)
	}
	r := Request{Unit: unit, Function: Function(p[0]), Address: binary.BigEndian.Uint16(p[1:])}
	switch r.Function {
	case ReadHolding, ReadInput:
		r.Count = int(binary.BigEndian.Uint16(p[3:]))
		p = p[5:]
	case WriteSingle:
		r.Values = values(p[3:5])
		p = p[5:]
	case WriteMultiple:
		count := int(binary.BigEndian.Uint16(p[3:]))
		if count < 1 || count > MaxWrite || len(p) != 6+2*count || int(p[5]) != 2*count {
			return Request{}, fmt.Errorf("write of %d registers in %d bytes: %w", count, len(p), ErrFrame)
		}
		r.Values = values(p[6:])
		p = nil
	}
	if err := r.Check(); err != nil {
		return Request{}, fmt.Errorf("%w: %w", err, ErrFrame)
	}
	if len(p) != 0 {
		return Request{}, fmt.Errorf("%d bytes behind the request: %w", len(p), ErrFrame)
	}
	return r, nil
}

// appendReply appends the message of r without unit and framing.
func appendReply(dst []byte, r Reply) ([]byte, error) {
	if r.Exception != 0 {
		if r.Function&exceptionBit != 0 || r.Function == 0 {
			return dst, fmt.Errorf("exception to function %d: expected 1 to 127", r.Function)
		}
		return append(dst, byte(r.Function)|exceptionBit, byte(r.Exception)), nil
	}
	switch r.Function {
	case ReadHolding, ReadInput:
		if len(r.Values) < 1 || len(r.Values) > MaxRead {
			return dst, fmt.Errorf("reply of %d registers: expected 1 to %d", len(r.Values), MaxRead)
		}
		dst = append(dst, byte(r.Function), byte(2*len(r.Values)))
		return appendValues(dst, r.Values), nil
	case WriteSingle:
		if len(r.Values) != 1 {
			return dst, fmt.Errorf("reply to a single write with %d values: expected 1", len(r.Values))
		}
		dst = binary.BigEndian.AppendUint16(append(dst, byte(r.Function)), r.Address)
		return binary.BigEndian.AppendUint16(dst, r.Values[0]), nil
	case WriteMultiple:
		if r.Count < 1 || r.Count > MaxWrite {
			return dst, fmt.Errorf("reply to a write of %d registers: expected 1 to %d", r.Count, MaxWrite)
		}
		dst = binary.BigEndian.AppendUint16(append(dst, byte(r.Function)), r.Address)
		return binary.BigEndian.AppendUint16(dst, uint16(r.Count)), nil
	}
	return dst, fmt.Errorf("function %d: expected 3, 4, 6 or 16", r.Function)
}

// decodeReply reads the message of a reply without unit and framing.
func decodeReply(unit byte, p []byte) (Reply, error) {
	if len(p) < 2 {
		return Reply{}, fmt.Errorf("reply of %d bytes is too short: %w", len(p), ErrFrame)
	}
	r := Reply{Unit: unit, Function: Function(p[0])}
	if p[0]&exceptionBit != 0 {
		r.Function, r.Exception = Function(p[0]&^exceptionBit), Exception(p[1])
		if len(p) != 2 || r.Exception == 0 || r.Function == 0 {
			return Reply{}, fmt.Errorf("exception %d to function %d in %d bytes: %w", r.Exception, r.Function, len(p), ErrFrame)
		}
		return r, nil
	}
	switch r.Function {
	case ReadHolding, ReadInput:
		count := int(p[1])
		if count < 2 || count%2 != 0 || count > 2*MaxRead || len(p) != 2+count {
			return Reply{}, fmt.Errorf("reply announces %d bytes and carries %d: %w", count, len(p)-2, ErrFrame)
		}
		r.Values = values(p[2:])
		return r, nil
	case WriteSingle, WriteMultiple:
		if len(p) != 5 {
			return Reply{}, fmt.Errorf("reply to function %d has %d bytes, expected 5: %w", r.Function, len(p), ErrFrame)
		}
		r.Address = binary.BigEndian.Uint16(p[1:])
		if r.Function == WriteSingle {
			r.Values = values(p[3:])
			return r, nil
		}
		r.Count = int(binary.BigEndian.Uint16(p[3:]))
		if r.Count < 1 || r.Count > MaxWrite {
			return Reply{}, fmt.Errorf("reply to a write of %d registers: %w", r.Count, ErrFrame)
		}
		return r, nil
	}
	return Reply{}, fmt.Errorf("reply with function %d: expected 3, 4, 6 or 16: %w", r.Function, ErrFrame)
}

// Answers reports whether r can be the reply to req: nil, the Exception that
// the unit sent, or an error that wraps ErrMismatch.
func (r Reply) Answers(req Request) error {
	if r.Unit != req.Unit {
		return fmt.Errorf("reply from unit %d, expected unit %d: %w", r.Unit, req.Unit, ErrMismatch)
	}
	if r.Function != req.Function {
		return fmt.Errorf("reply to function %d, expected function %d: %w", r.Function, req.Function, ErrMismatch)
	}
	if r.Exception != 0 {
		return r.Exception
	}
	switch r.Function {
	case WriteSingle:
		if r.Address != req.Address || r.Values[0] != req.Values[0] {
			return fmt.Errorf("reply says register %d := %d, expected register %d := %d: %w",
				r.Address, r.Values[0], req.Address, req.Values[0], ErrMismatch)
		}
	case WriteMultiple:
		if r.Address != req.Address || r.Count != len(req.Values) {
			return fmt.Errorf("reply says %d registers from %d on, expected %d from %d on: %w",
				r.Count, r.Address, len(req.Values), req.Address, ErrMismatch)
		}
	default:
		if len(r.Values) != req.Count {
			return fmt.Errorf("reply carries %d registers, expected %d: %w", len(r.Values), req.Count, ErrMismatch)
		}
	}
	return nil
}

// Shape is all that a reply to a read tells about its request. Replies to two
// requests of the same shape cannot be told apart, so a caller must not have
// one such reply outstanding when it asks for the other.
type Shape struct {
	Unit     byte
	Function Function
	Count    int
}

// Shape returns the shape of the reply that r asks for.
func (r Request) Shape() Shape { return Shape{r.Unit, r.Function, r.Count} }

func appendValues(dst []byte, v []uint16) []byte {
	for _, x := range v {
		dst = binary.BigEndian.AppendUint16(dst, x)
	}
	return dst
}

func values(p []byte) []uint16 {
	v := make([]uint16, len(p)/2)
	for i := range v {
		v[i] = binary.BigEndian.Uint16(p[2*i:])
	}
	return v
}
