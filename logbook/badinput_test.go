package logbook

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"
)

// TestBadInput puts into a logbook what people and other programs may put
// there. Each is reported by name, and what is sound is read all the same.
func TestBadInput(t *testing.T) {
	for _, c := range []struct {
		name  string
		spoil func(d *memDisk)
		want  string // in the damage or the notices of verify
		left  int    // records that are read, of 18
	}{
		{"a foreign file", func(d *memDisk) { d.names["thesis.odt"] = &memInode{data: []byte("PK")} },
			"thesis.odt does not belong to the logbook", 18},
		{"a foreign segment", func(d *memDisk) { d.names["000009.jsonl"] = &memInode{data: []byte("{\"a\":1}\n{\"b\":2}\n")} },
			`000009.jsonl, byte 0, after record 18: no segment: begins with "{\"a\":1}"`, 18},
		{"an empty segment", func(d *memDisk) { d.names["000009.jsonl"] = &memInode{} },
			"the file is empty", 18},
		{"a newer format", func(d *memDisk) {
			d.names["000004.jsonl"] = &memInode{data: heading{Format: 2, Segment: 4, AfterSeq: 18, AfterCRC: "00000000"}.whole()}
		}, "newer format: format 2, this program reads format 1", 18},
		{"a kind of a newer program", func(d *memDisk) { d.extend("brand_new", `{"x":[1,{"y":null}]}`) }, "", 19},
		{"data that is no JSON", func(d *memDisk) { d.extend("note", `{"text":"\x"}`) }, "its data is not JSON", 19},
		{"a day that is none", func(d *memDisk) {
			i := d.names["000003.jsonl"]
			i.data = rechain(bytes.Replace(i.data, []byte("2026-12-01T11:42:12"), []byte("2026-13-41T11:42:12"), 1))
		}, "is no time", 17},
		{"the clock goes back a day", func(d *memDisk) {
			i := d.names["000003.jsonl"]
			i.data = rechain(bytes.ReplaceAll(i.data, []byte(`"t":"2026-12-01`), []byte(`"t":"2026-11-30`)))
		}, "the clock went back by 24h0m0s at record 12", 18},
		{"a segment copied to another number", func(d *memDisk) { d.names["000007.jsonl"] = d.names["000001.jsonl"] },
			"000007.jsonl, byte 0, after record 0: same number twice: it says that it is segment 1", 18},
		{"a packed segment that is another", func(d *memDisk) { d.names["000001.jsonl.zst"] = &memInode{data: []byte("no frame")} },
			"000001.jsonl.zst, byte 0, after record 0: same number twice", 18},
		{"a segment is gone", func(d *memDisk) { delete(d.names, "000002.jsonl") },
			"missing: records 7 to 11, in front of this segment", 13},
		{"the first segment is gone", func(d *memDisk) { delete(d.names, "000001.jsonl") },
			"missing: records 1 to 6, in front of this segment", 12},
		{"a seal is gone", func(d *memDisk) {
			i := d.names["000001.jsonl"]
			i.data = i.data[:bytes.LastIndexByte(i.data[:len(i.data)-1], '\n')+1]
		}, "000001.jsonl was sealed and is not any more", 18},
		{"a segment in the place of another", func(d *memDisk) {
			d.names["000002.jsonl"] = &memInode{data: d.names["000001.jsonl"].data}
		}, "same number twice: it says that it is segment 1", 13},
		{"a line of two megabytes", func(d *memDisk) {
			i := d.names["000003.jsonl"]
			i.data = slices.Concat(i.data, bytes.Repeat([]byte("x"), 2<<20), []byte("\n"))
		}, "a line of 2097153 bytes", 18},
		{"a byte-order mark", func(d *memDisk) {
			i := d.names["000001.jsonl"]
			i.data = slices.Concat([]byte("\xef\xbb\xbf"), i.data)
		}, "no segment: begins with", 17},
		{"CRLF line ends", func(d *memDisk) {
			i := d.names["000003.jsonl"]
			i.data = bytes.ReplaceAll(i.data, []byte("\n"), []byte("\r\n"))
		}, "no segment: begins with", 11},
	} {
		t.Run(c.name, func(t *testing.T) {
			d := fixtureInMemory(t)
			c.spoil(d)
			before := d.clone()
			r, err := verify(d, true)
			if err != nil {
				t.Fatal(err)
			}
			said := strings.Join(r.Notices, "\n")
			for _, damage := range r.Damage {
				said += "\n" + damage.Error()
			}
			if !strings.Contains(said, c.want) {
				t.Errorf("no %q in\n%s", c.want, said)
			}
			got, _ := readAll(t, d)
			if len(got) != c.left {
				t.Errorf("%d records are read, expected %d\n%s", len(got), c.left, said)
			}
			if !reflect.DeepEqual(d.clone(), before) {
				t.Error("reading changed the folder")
			}
			// The logbook can be continued, or says why not.
			b, err := open(d, Options{untidy: true})
			if err != nil {
				if c.name != "a newer format" || !strings.Contains(err.Error(), "format 2") {
					t.Error(err)
				}
				return
			}
			if _, err := b.Append(stampAt(time.Hour), "note", map[string]string{"text": "goes on"}); err != nil {
				t.Error(err)
			}
			if err := b.Close(); err != nil {
				t.Error(err)
			}
			after, _ := readAll(t, d)
			if n := len(after); n == 0 || string(after[n-1].Data) != `{"text":"goes on"}` {
				t.Errorf("what was written later is not read: %d records", n)
			}
		})
	}
}

// clone returns the content of every file but indexes.
func (d *memDisk) clone() map[string]string {
	files := map[string]string{}
	for name, i := range d.names {
		if !strings.HasSuffix(name, indexSuffix) {
			files[name] = string(i.data)
		}
	}
	return files
}

// whole returns the segment line of h.
func (h heading) whole() []byte {
	b := appendHead(nil, new(stamper), h.AfterSeq, stampAt(0), kindSegment)
	b, _ = appendTail(h.append(b), 0, noDigits)
	return b
}

// extend adds a record with a sound chain to the segment that is being written.
func (d *memDisk) extend(kind, data string) {
	i := d.names["000003.jsonl"]
	i.data = rechain(fmt.Appendf(i.data, `{"seq":19,"t":"2026-12-01T11:42:20.000000Z","mono_ns":1,"kind":"%s","data":%s,"crc":"00000000"}`+"\n", kind, data))
}

// rechain computes every crc of a segment anew, as a forger would.
func rechain(content []byte) (out []byte) {
	prev := noDigits
	for i, l := range bytes.SplitAfter(content, []byte("\n")) {
		if len(l) == 0 {
			continue
		}
		start := len(out)
		out = append(out, l[:len(l)-tailSize]...)
		if i > 0 {
			out, prev = appendTail(out, start, prev)
			continue
		}
		out, _ = appendTail(out, start, noDigits)
		if _, h, err := parseHeading(out[:len(out)-1]); err == nil {
			prev = digits([]byte(h.AfterCRC))
		}
	}
	return out
}

// FuzzSegment feeds bytes to everything that reads a segment.
func FuzzSegment(f *testing.F) {
	for _, name := range []string{"000001.jsonl", "000002.jsonl", "000003.jsonl"} {
		f.Add(fixtureOf(f, name))
	}
	f.Add([]byte("\n\n{\"seq\":"))
	f.Fuzz(expectRobust)
}

// TestMutations spoils a segment in thousands of ways.
func TestMutations(t *testing.T) {
	whole := fixtureOf(t, "000003.jsonl")
	random := rand.New(rand.NewPCG(11, 11))
	for range 3000 {
		content := slices.Clone(whole)
		for range 1 + random.IntN(12) {
			at := random.IntN(len(content))
			switch random.IntN(3) {
			case 0:
				content[at] = byte(random.IntN(256))
			case 1:
				content = slices.Delete(content, at, min(len(content), at+random.IntN(50)))
			case 2:
				content = slices.Insert(content, at, whole[at%len(whole):min(len(whole), at%len(whole)+random.IntN(300))]...)
			}
			if len(content) == 0 {
				break
			}
		}
		if expectRobust(t, content); t.Failed() {
			t.Fatalf("%q", content)
		}
	}
}

// expectRobust reads content as a segment in every way and goes on behind it.
func expectRobust(t *testing.T, content []byte) {
	d := newMemDisk(rand.New(rand.NewPCG(1, 1)))
	d.names["000001.jsonl"] = &memInode{data: content, synced: content}
	report, err := verify(d, true)
	if err != nil {
		t.Fatal(err)
	}
	before := map[uint64]bool{}
	for rec, err := range records(d, Filter{}) {
		if err != nil {
			if AsDamage(err) == nil {
				t.Fatal(err)
			}
			continue
		}
		if before[rec.Seq] {
			t.Fatalf("record %d twice", rec.Seq)
		}
		before[rec.Seq] = true
	}
	if uint64(len(before)) > report.Records {
		t.Fatalf("%d records are read, verify counts %d", len(before), report.Records)
	}
	b, err := open(d, Options{untidy: true})
	if err != nil {
		return // refusing is fine
	}
	seq, err := b.Append(stampAt(0), "note", struct{}{})
	if err != nil {
		t.Fatal(err)
	}
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	after := map[uint64]bool{}
	for rec, err := range records(d, Filter{}) {
		if err == nil {
			after[rec.Seq] = true
		}
	}
	for old := range before {
		if !after[old] {
			t.Fatalf("record %d was there before record %d was added", old, seq)
		}
	}
	if !after[seq] || before[seq] {
		t.Fatalf("record %d was added to %d and is not read", seq, len(before))
	}
}
