package logbook

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"hash/crc32"
	"math"
	"reflect"
	"strconv"
	"strings"
	"time"
	"unicode/utf8"

	"barline/model/reading"
)

// Appender is data that writes itself as one JSON object at the end of dst.
// Append uses it in place of encoding/json; it must not keep dst.
type Appender interface {
	AppendJSON(dst []byte) []byte
}

const (
	maxLine     = 1 << 20
	stampLayout = "2006-01-02T15:04:05.000000Z"
	stampSize   = len(stampLayout)
	crcField    = `,"crc":"`
	// tailSize is what follows the checked bytes of a line, LF included.
	tailSize = len(crcField) + 8 + len("\"}\n")
)

// digits is a checksum as the text that the next record chains from.
type digits [8]byte

// value reads the digits; ok is false where they are not lower-case
// hexadecimal.
func (d digits) value() (v uint32, ok bool) {
	for _, c := range d {
		switch {
		case c-'0' <= 9:
			v = v<<4 | uint32(c-'0')
		case c-'a' <= 5:
			v = v<<4 | uint32(c-'a'+10)
		default:
			return 0, false
		}
	}
	return v, true
}

var noDigits = digits{'0', '0', '0', '0', '0', '0', '0', '0'}

var castagnoli = crc32.MakeTable(crc32.Castagnoli)

const hexDigits = "0123456789abcdef"

// checksum returns the crc of a line whose checked bytes are body and whose
// predecessor's crc is prev.
func checksum(prev digits, body []byte) (d digits) {
	sum := chained(prev, body)
	for i := len(d) - 1; i >= 0; i-- {
		d[i] = hexDigits[sum&15]
		sum >>= 4
	}
	return d
}

// chained is checksum as a number. The eight digits go through the table one
// by one, because the library would move them to the heap.
func chained(prev digits, body []byte) uint32 {
	crc := ^uint32(0)
	for _, c := range prev {
		crc = castagnoli[byte(crc)^c] ^ crc>>8
	}
	return crc32.Update(^crc, castagnoli, body)
}

// appendTail completes the line that begins at start with its crc field.
func appendTail(dst []byte, start int, prev digits) ([]byte, digits) {
	d := checksum(prev, dst[start:])
	dst = append(dst, crcField...)
	dst = append(dst, d[:]...)
	return append(dst, '"', '}', '\n'), d
}

// stamper writes stamps. It remembers the text of the last whole second,
// because records come many to the second.
type stamper struct {
	second int64
	text   [stampSize]byte
	valid  bool
}

func (s *stamper) append(dst []byte, t time.Time) []byte {
	if sec := t.Unix(); !s.valid || sec != s.second {
		copy(s.text[:], t.UTC().Format(stampLayout))
		s.second, s.valid = sec, true
	}
	micro := t.Nanosecond() / 1000
	for i := stampSize - 2; i > stampSize-8; i-- {
		s.text[i] = byte('0' + micro%10)
		micro /= 10
	}
	return append(dst, s.text[:]...)
}

// appendHead writes a line up to the value of its data.
func appendHead(dst []byte, s *stamper, seq uint64, at reading.Stamp, kind string) []byte {
	dst = append(dst, `{"seq":`...)
	dst = strconv.AppendUint(dst, seq, 10)
	dst = append(dst, `,"t":"`...)
	dst = s.append(dst, at.UTC)
	dst = append(dst, `","mono_ns":`...)
	dst = strconv.AppendInt(dst, int64(at.Mono), 10)
	dst = append(dst, `,"kind":"`...)
	dst = append(dst, kind...)
	return append(dst, `","data":`...)
}

// checkStamp refuses what four digits of year cannot hold.
func checkStamp(at reading.Stamp) error {
	if y := at.UTC.UTC().Year(); y < 0 || y > 9999 {
		return fmt.Errorf("logbook: time in the year %d, expected 0 to 9999", y)
	}
	return nil
}

func validKind(kind string) bool {
	if len(kind) == 0 || len(kind) > 32 || kind[0] == '_' {
		return false
	}
	for i := 0; i < len(kind); i++ {
		if c := kind[i]; (c < 'a' || c > 'z') && c != '_' {
			return false
		}
	}
	return true
}

// AppendFloat writes v as a JSON number at the end of dst, and null where v is
// not finite.
func AppendFloat(dst []byte, v float64) []byte {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return append(dst, "null"...)
	}
	format := byte('f')
	if a := math.Abs(v); a != 0 && (a < 1e-6 || a >= 1e21) {
		format = 'e'
	}
	return strconv.AppendFloat(dst, v, format, -1, 64)
}

// AppendString writes s as a JSON string at the end of dst. Bytes that are not
// UTF-8 become U+FFFD.
func AppendString(dst []byte, s string) []byte {
	dst = append(dst, '"')
	from := 0
	for i := 0; i < len(s); {
		c := s[i]
		if c >= ' ' && c < utf8.RuneSelf && c != '"' && c != '\\' {
			i++
			continue
		}
		if c >= utf8.RuneSelf {
			r, size := utf8.DecodeRuneInString(s[i:])
			if r == utf8.RuneError && size == 1 {
				dst = append(append(dst, s[from:i]...), "\uFFFD"...)
				from = i + 1
			}
			i += size
			continue
		}
		dst = append(dst, s[from:i]...)
		switch c {
		case '"', '\\':
			dst = append(dst, '\\', c)
		case '\n':
			dst = append(dst, '\\', 'n')
		case '\r':
			dst = append(dst, '\\', 'r')
		case '\t':
			dst = append(dst, '\\', 't')
		default:
			dst = append(dst, '\\', 'u', '0', '0', hexDigits[c>>4], hexDigits[c&15])
		}
		i++
		from = i
	}
	return append(append(dst, s[from:]...), '"')
}

const notFinite = "not a finite number"

func appendReading(dst []byte, r *reading.Reading) []byte {
	dst = append(dst, `{"channel":`...)
	dst = AppendString(dst, r.Channel)
	dst = append(dst, `,"role":"`...)
	dst = append(dst, r.Role.String()...)
	dst = append(dst, `","value":`...)
	dst = AppendFloat(dst, r.Value)
	dst = append(dst, `,"status":"`...)
	dst = append(dst, r.Status.String()...)
	dst = append(dst, '"')
	reason := r.Reason
	if reason == "" && (math.IsNaN(r.Value) || math.IsInf(r.Value, 0)) {
		reason = notFinite
	}
	if reason != "" {
		dst = append(dst, `,"reason":`...)
		dst = AppendString(dst, reason)
	}
	return append(dst, '}')
}

// encode returns data as one JSON object by way of encoding/json. Members that
// are not finite become null and are listed in a member "not_finite".
func encode(data any) ([]byte, error) {
	b, err := marshal(data)
	var unsupported *json.UnsupportedValueError
	if errors.As(err, &unsupported) {
		var missing []string
		plain := finite(reflect.ValueOf(data), "", &missing)
		if m, ok := plain.(map[string]any); ok && len(missing) > 0 {
			m["not_finite"] = missing
			b, err = marshal(m)
		}
	}
	if err != nil {
		return nil, err
	}
	if len(b) == 0 || b[0] != '{' {
		return nil, fmt.Errorf("%T is not written as a JSON object", data)
	}
	return b, nil
}

func marshal(data any) ([]byte, error) {
	var buf bytes.Buffer
	e := json.NewEncoder(&buf)
	e.SetEscapeHTML(false)
	if err := e.Encode(data); err != nil {
		return nil, err
	}
	return bytes.TrimSuffix(buf.Bytes(), []byte{'\n'}), nil
}

// finite rebuilds v from maps and slices with nil in place of what is not
// finite, and notes the names of those members.
func finite(v reflect.Value, path string, missing *[]string) any {
	for v.Kind() == reflect.Pointer || v.Kind() == reflect.Interface {
		if v.IsNil() {
			return nil
		}
		v = v.Elem()
	}
	switch v.Kind() {
	case reflect.Float32, reflect.Float64:
		if f := v.Float(); math.IsNaN(f) || math.IsInf(f, 0) {
			*missing = append(*missing, path)
			return nil
		}
	case reflect.Slice, reflect.Array:
		list := make([]any, v.Len())
		for i := range list {
			list[i] = finite(v.Index(i), path+"["+strconv.Itoa(i)+"]", missing)
		}
		return list
	case reflect.Map:
		if v.Type().Key().Kind() != reflect.String {
			return v.Interface()
		}
		m := make(map[string]any, v.Len())
		for _, k := range v.MapKeys() {
			m[k.String()] = finite(v.MapIndex(k), member(path, k.String()), missing)
		}
		return m
	case reflect.Struct:
		if _, ok := v.Interface().(json.Marshaler); ok {
			return v.Interface()
		}
		m := make(map[string]any, v.NumField())
		for i := range v.NumField() {
			f := v.Type().Field(i)
			name, options, _ := strings.Cut(f.Tag.Get("json"), ",")
			if !f.IsExported() || name == "-" || strings.Contains(options, "omit") && v.Field(i).IsZero() {
				continue
			}
			if name == "" {
				name = f.Name
			}
			m[name] = finite(v.Field(i), member(path, name), missing)
		}
		return m
	}
	return v.Interface()
}

func member(path, name string) string {
	if path == "" {
		return name
	}
	return path + "." + name
}
