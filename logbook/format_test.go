package logbook

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"barline/model/reading"
)

var update = flag.Bool("update", false, "write the fixture of the present format version anew")

// plainCRC is CRC-32C one bit at a time, from the polynomial alone.
func plainCRC(b []byte) uint32 {
	crc := ^uint32(0)
	for _, c := range b {
		crc ^= uint32(c)
		for range 8 {
			crc = crc>>1 ^ 0x82f63b78*(crc&1) // 0x1edc6f41, reflected
		}
	}
	return ^crc
}

func TestChecksumVectors(t *testing.T) {
	up, down := make([]byte, 32), make([]byte, 32)
	for i := range up {
		up[i], down[i] = byte(i), byte(31-i)
	}
	// RFC 3720, appendix B.4. It lists the bytes in the order sent, least
	// significant first: "aa 36 91 8a" is 8a9136aa.
	pdu := []byte{
		0x01, 0xc0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0x14, 0, 0, 0, 0, 0, 0x04, 0,
		0, 0, 0, 0x14, 0, 0, 0, 0x18, 0x28, 0, 0, 0, 0, 0, 0, 0, 0x02, 0, 0, 0, 0, 0, 0, 0,
	}
	for _, c := range []struct {
		name string
		in   []byte
		want string
	}{
		{"32 bytes of zeroes", make([]byte, 32), "8a9136aa"},
		{"32 bytes of ones", bytes.Repeat([]byte{0xff}, 32), "62a8ab43"},
		{"32 bytes ascending", up, "46dd794e"},
		{"32 bytes descending", down, "113fdb5c"},
		{"iSCSI SCSI Read (10) command PDU", pdu, "d9963a56"},
	} {
		if got := fmt.Sprintf("%08x", plainCRC(c.in)); got != c.want {
			t.Errorf("plain %s: %s, RFC 3720 B.4 has %s", c.name, got, c.want)
		}
		// checksum runs over two pieces; the first is eight bytes.
		if got := checksum(digits(c.in[:8]), c.in[8:]); string(got[:]) != c.want {
			t.Errorf("%s: %s, RFC 3720 B.4 has %s", c.name, got[:], c.want)
		}
	}
}

func TestDigestVectors(t *testing.T) {
	// FIPS 180-4, worked examples of SHA-256 (NIST CSRC, one and two blocks).
	for in, want := range map[string]string{
		"abc": "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad",
		"abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq": "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1",
	} {
		o := openSegmentFile{f: &memFile{newMemDisk(nil), &memInode{}}, sum: sha256.New()}
		for i := range in { // as a segment grows
			if err := o.append([]byte{in[i]}); err != nil {
				t.Fatal(err)
			}
		}
		if got := hex.EncodeToString(o.sum.Sum(nil)); got != want {
			t.Errorf("%q: %s, FIPS 180-4 has %s", in, got, want)
		}
	}
}

const fixture = "testdata/version1"

// copyFolder copies the files of a logbook, as a killed program leaves them.
func copyFolder(t *testing.T, from, to string) {
	t.Helper()
	entries, err := os.ReadDir(from)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.MkdirAll(to, 0o755); err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if e.Name() == lockName || e.IsDir() {
			continue
		}
		b, err := os.ReadFile(filepath.Join(from, e.Name()))
		if err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.Join(to, e.Name()), b, 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// writeFixture writes three segments: one sealed, one sealed by recovery, one
// that is being written.
func writeFixture(t *testing.T, dir string) {
	at := time.Duration(0)
	run := func(dir string, readings int) *Book {
		b, err := Open(dir, Options{})
		if err != nil {
			t.Fatal(err)
		}
		b.Append(stampAt(at), "start", map[string]string{"version": "0.1"})
		for range readings {
			at += 1250 * time.Millisecond
			b.Append(stampAt(at), "reading", reading.Reading{
				Channel: "cell A", Role: reading.CellAPressure, Value: 901325.5 + at.Seconds(), Status: reading.Good})
		}
		b.Append(stampAt(at), "note", map[string]string{"text": "\"9 bar\" held\tover night\n\u03c0 \U0001d4ab \u2028"})
		b.Append(stampAt(at), "reading", reading.Reading{
			Channel: "emission", Role: reading.Emission, Status: reading.FunctionCheck, Reason: "shutter closed"})
		if err := b.Sync(); err != nil {
			t.Fatal(err)
		}
		return b
	}
	first, second := t.TempDir(), t.TempDir()
	if err := run(first, 3).Close(); err != nil {
		t.Fatal(err)
	}
	killed := run(first, 2)
	copyFolder(t, first, second)
	if err := killed.Close(); err != nil {
		t.Fatal(err)
	}
	cut := filepath.Join(second, "000002.jsonl")
	content, err := os.ReadFile(cut)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(cut, append(content, `{"seq":12,"t":"2026-12-01T11:4`...), 0o644); err != nil {
		t.Fatal(err)
	}
	killed = run(second, 4)
	if err := os.RemoveAll(dir); err != nil {
		t.Fatal(err)
	}
	copyFolder(t, second, dir)
	if err := killed.Close(); err != nil {
		t.Fatal(err)
	}
}

// fixtureRecords are the kinds in the fixture, with the value of readings.
const fixtureRecords = "start 901326.75 901328 901329.25 note 0 start 901330.5 901331.75 note 0 start 901333 901334.25 901335.5 901336.75 note 0"

func TestFixture(t *testing.T) {
	if *update {
		writeFixture(t, fixture)
	}
	records, damage := collect(t, fixture, Filter{})
	for _, d := range damage {
		t.Error(d)
	}
	var got []string
	for i, r := range records {
		if r.Seq != uint64(i+1) {
			t.Errorf("record %d at place %d", r.Seq, i+1)
		}
		word := r.Kind
		if r.Kind == "reading" {
			var d struct{ Value float64 }
			if err := r.Decode(&d); err != nil {
				t.Error(err)
			}
			word = fmt.Sprint(d.Value)
		}
		got = append(got, word)
	}
	if strings.Join(got, " ") != fixtureRecords {
		t.Errorf("got  %s\nwant %s", strings.Join(got, " "), fixtureRecords)
	}
	r := sound(t, fixture)
	if len(r.Segments) != 3 || !r.Segments[0].Sealed || !r.Segments[1].Sealed || r.Segments[2].Sealed || len(r.Notices) != 2 {
		t.Errorf("%d segments, notices %q", len(r.Segments), r.Notices)
	}
}

// TestFixtureByTheBook checks the fixture by what doc.go says, with nothing of
// this package: a general JSON parser, a bitwise CRC, a digest of the file.
func TestFixtureByTheBook(t *testing.T) {
	names, err := filepath.Glob(fixture + "/*.jsonl")
	if err != nil || len(names) == 0 {
		t.Fatal(names, err)
	}
	seq, crc := 0.0, "00000000"
	for n, name := range names {
		content, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		before := 0
		for i, line := range strings.SplitAfter(strings.TrimSuffix(string(content), "\n"), "\n") {
			line = strings.TrimSuffix(line, "\n")
			var rec struct {
				Seq  float64
				T    time.Time // RFC 3339
				Kind string
				Data map[string]any
				CRC  string
			}
			if err := json.Unmarshal([]byte(line), &rec); err != nil {
				t.Fatalf("%s: %v", line, err)
			}
			body, _, _ := strings.Cut(line, `,"crc":"`)
			chain := crc
			switch rec.Kind {
			case "segment":
				if i != 0 || rec.Data["segment"] != float64(n+1) || rec.Data["format"] != 1.0 || rec.Data["after_crc"] != crc || rec.Data["after_seq"] != seq {
					t.Errorf("%s line %d: %v", name, i, rec.Data)
				}
				chain = "00000000"
			case "seal":
				digest := sha256.Sum256(content[:before])
				if rec.Data["sha256"] != hex.EncodeToString(digest[:]) || rec.Data["bytes"] != float64(before) || rec.Data["records"] != float64(i-1) {
					t.Errorf("%s: %v", name, rec.Data)
				}
			default:
				if seq++; rec.Seq != seq {
					t.Errorf("record %v, expected %v", rec.Seq, seq)
				}
				crc = rec.CRC
			}
			if want := fmt.Sprintf("%08x", plainCRC([]byte(chain+body))); rec.CRC != want {
				t.Errorf("%s line %d: crc %s, computed %s", name, i, rec.CRC, want)
			}
			before += len(line) + 1
		}
	}
}

// fixtureInMemory returns the fixture as a disk that may be changed.
func fixtureInMemory(t *testing.T) *memDisk {
	t.Helper()
	d := newMemDisk(rand.New(rand.NewPCG(1, 1)))
	names, err := filepath.Glob(fixture + "/0*")
	if err != nil {
		t.Fatal(err)
	}
	for _, name := range names {
		b, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		d.names[filepath.Base(name)] = &memInode{data: b, synced: b}
	}
	return d
}

// fixtureOf returns the content of one segment of the fixture.
func fixtureOf(t testing.TB, name string) []byte {
	t.Helper()
	b, err := os.ReadFile(filepath.Join(fixture, name))
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func readAll(t *testing.T, d disk) (all []Record, damage []*Damage) {
	t.Helper()
	for rec, err := range records(d, Filter{}) {
		if err == nil {
			all = append(all, rec)
		} else if found := AsDamage(err); found != nil {
			damage = append(damage, found)
		} else {
			t.Fatal(err)
		}
	}
	return all, damage
}

// TestCutAtEveryByte cuts the segment that is being written at each byte and
// goes on in what is left.
func TestCutAtEveryByte(t *testing.T) {
	all, _ := readAll(t, fixtureInMemory(t))
	whole := fixtureInMemory(t).names["000003.jsonl"].data
	for cut := range len(whole) + 1 {
		d := fixtureInMemory(t)
		part := slices.Clone(whole[:cut])
		d.names["000003.jsonl"] = &memInode{data: part, synced: part}
		want := all[:11+max(0, bytes.Count(part, []byte{'\n'})-1)] // 11 in the segments in front
		got, damage := readAll(t, d)
		if !reflect.DeepEqual(got, want) {
			t.Fatalf("cut at %d: %d records, expected %d", cut, len(got), len(want))
		}
		if torn := len(part) == 0 || part[cut-1] != '\n'; torn != (len(damage) == 1 && damage[0].Kind == Torn) {
			t.Errorf("cut at %d: damage %v", cut, damage)
		}

		b, err := open(d, Options{})
		if err != nil {
			t.Fatalf("cut at %d: %v", cut, err)
		}
		if seq, err := b.Append(stampAt(time.Hour), "note", struct{}{}); err != nil || seq != uint64(len(want)+1) {
			t.Errorf("cut at %d: record %d, %v", cut, seq, err)
		}
		if err := b.Close(); err != nil {
			t.Fatalf("cut at %d: %v", cut, err)
		}
		got, damage = readAll(t, d)
		if len(got) != len(want)+1 || !reflect.DeepEqual(got[:len(want)], want) || len(damage) > 0 {
			t.Errorf("cut at %d and opened: %d records, expected %d; damage %v", cut, len(got), len(want)+1, damage)
		}
		if r, err := verify(d, true); err != nil || len(r.Damage) > 0 || r.Records != uint64(len(got)) {
			t.Errorf("cut at %d and opened: %d records, %v %v", cut, r.Records, r.Damage, err)
		}
	}
}

// TestEveryChangeIsFound changes each byte, removes each line and moves each
// line of the fixture.
func TestEveryChangeIsFound(t *testing.T) {
	expect := func(what, name string, content []byte, most int) {
		t.Helper()
		d := fixtureInMemory(t)
		before, _ := readAll(t, d)
		d.names[name] = &memInode{data: content}
		r, err := verify(d, false)
		if err != nil || len(r.Damage) == 0 {
			t.Errorf("%s of %s was not found: %v", what, name, err)
			return
		}
		// What is left is what was there, and no more is lost than the place.
		after, damage := readAll(t, d)
		if len(damage) == 0 && !strings.Contains(r.Damage[0].Text, "digest") && r.Damage[0].Kind != Seal {
			t.Errorf("%s of %s: the reader did not report %v", what, name, r.Damage[0])
		}
		i := 0
		for _, rec := range before {
			if i < len(after) && reflect.DeepEqual(after[i], rec) {
				i++
			}
		}
		if i != len(after) || len(before)-len(after) > most {
			t.Errorf("%s of %s: %d records of %d are left, %d of them as they were", what, name, len(after), len(before), i)
		}
	}
	for _, name := range []string{"000001.jsonl", "000002.jsonl", "000003.jsonl"} {
		content := fixtureInMemory(t).names[name].data
		for i := range content {
			if name == "000003.jsonl" && i == len(content)-1 {
				continue // that is a torn tail
			}
			changed := slices.Clone(content)
			changed[i] ^= 1 << (i % 8)
			expect(fmt.Sprintf("a change of byte %d", i), name, changed, 2)
		}
		lines := bytes.SplitAfter(content, []byte{'\n'})
		lines = lines[:len(lines)-1]
		for i := range lines {
			last := i == len(lines)-1
			if !last || name != "000003.jsonl" {
				expect(fmt.Sprintf("removing line %d", i+1), name, bytes.Join(slices.Delete(slices.Clone(lines), i, i+1), nil), 2)
				expect(fmt.Sprintf("doubling line %d", i+1), name, bytes.Join(slices.Insert(slices.Clone(lines), i, lines[i]), nil), 1)
			}
			if !last {
				moved := slices.Clone(lines)
				moved[i], moved[i+1] = moved[i+1], moved[i]
				expect(fmt.Sprintf("moving line %d", i+1), name, bytes.Join(moved, nil), 3)
			}
		}
	}
}
