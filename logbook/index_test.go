package logbook

import (
	"context"
	"fmt"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"
	"testing/synctest"
	"time"

	"barline/model/reading"
)

// bigBook fills a disk with n records in segments of several blocks each. The
// bench clock is set back once.
func bigBook(t testing.TB, d disk, n int) {
	t.Helper()
	b, err := open(d, Options{SegmentBytes: 1 << 20, MemoryBytes: 64 << 20, untidy: true})
	if err != nil {
		t.Fatal(err)
	}
	for i := range n {
		at := time.Duration(i) * 10 * time.Millisecond
		if i > n/2 {
			at -= time.Minute
		}
		kind, data := "reading", any(reading.Reading{
			Channel: fmt.Sprintf("cell %c", 'A'+i%3), Role: reading.CellAPressure, Value: 9e5 + float64(i), Status: reading.Good})
		if i%997 == 0 {
			kind, data = "note", map[string]int{"n": i}
		}
		if _, err := b.Append(stampAt(at), kind, data); err != nil {
			t.Fatal(err)
		}
	}
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
}

func withFilter(t *testing.T, d disk, f Filter) (seqs []uint64) {
	t.Helper()
	for rec, err := range records(d, f) {
		if err != nil {
			t.Fatal(err)
		}
		seqs = append(seqs, rec.Seq)
	}
	return seqs
}

// TestIndexChangesNothing asks with and without an index, with a spoilt one,
// and of compressed segments; the answer by hand is over all records.
func TestIndexChangesNothing(t *testing.T) {
	d := newMemDisk(rand.New(rand.NewPCG(1, 1)))
	const n = 20_000
	bigBook(t, d, n)
	all, _ := readAll(t, d)
	if len(all) != n {
		t.Fatalf("%d records", len(all))
	}
	r := rand.New(rand.NewPCG(7, 7))
	ask := func(how string) {
		t.Helper()
		for range 6 {
			from := testStart.Add(time.Duration(r.IntN(n*10)) * time.Millisecond)
			f := Filter{From: from, To: from.Add(time.Duration(r.IntN(40_000)) * time.Millisecond)}
			switch r.IntN(4) {
			case 0:
				f.Kinds = []string{"note"}
			case 1:
				f.Channels = []string{"cell B"}
			case 2:
				f = Filter{After: uint64(r.IntN(n))}
			}
			var want []uint64
			for _, rec := range all {
				inTime := f.From.IsZero() || !rec.UTC.Before(f.From) && rec.UTC.Before(f.To)
				inKind := f.Kinds == nil || rec.Kind == "note"
				inChannel := f.Channels == nil || strings.Contains(string(rec.Data), `"cell B"`)
				if inTime && inKind && inChannel && rec.Seq > f.After {
					want = append(want, rec.Seq)
				}
			}
			if got := withFilter(t, d, f); !reflect.DeepEqual(got, want) {
				t.Fatalf("%s, %+v: %d records, expected %d", how, f, len(got), len(want))
			}
		}
	}
	ask("first")
	c, err := listContents(d)
	if err != nil || len(c.segments) < 3 || len(c.foreign) > 0 {
		t.Fatalf("%+v %v", c, err)
	}
	for i, s := range c.segments {
		x, ok := loadIndex(d, s)
		if !ok || !x.expand() || len(x.blocks) < 2 && i+1 < len(c.segments) {
			t.Errorf("%s: index %v of %d blocks", s.name, ok, len(x.blocks))
		}
	}
	ask("with the index kept")
	for i, s := range c.segments {
		kept := d.names[segmentName(s.number, indexSuffix)]
		kept.data[i*31%len(kept.data)] ^= 4
		if _, ok := loadIndex(d, s); ok {
			t.Errorf("%s: a changed index was taken", s.name)
		}
	}
	ask("with a spoilt index")
	plain := 0
	for _, s := range c.segments {
		plain += len(d.names[s.name].data)
		if err := pack(context.Background(), d, s); err != nil {
			t.Fatal(err)
		}
	}
	ask("compressed")
	packed := 0
	c, _ = listContents(d)
	for _, s := range c.segments {
		if !s.packed {
			t.Errorf("%s is still there", s.name)
		}
		packed += len(d.names[s.name].data)
		kept, _ := loadIndex(d, s)
		kept.expand()
		if anew, ok := makeIndex(d, s); !ok || !reflect.DeepEqual(kept, anew) {
			t.Errorf("%s: the index made from the file is not that of compressing", s.name)
		}
		for _, b := range kept.blocks {
			if b.Size > maxLine {
				t.Errorf("%s: a frame of %d bytes", s.name, b.Size)
			}
		}
		d.remove(segmentName(s.number, indexSuffix))
	}
	t.Logf("%d bytes plain, %d compressed", plain, packed)
	ask("compressed, without an index")
	if again, damage := readAll(t, d); !reflect.DeepEqual(again, all) || len(damage) > 0 {
		t.Errorf("compressed: %d records, %v", len(again), damage)
	}
	if r, err := verify(d, true); err != nil || len(r.Damage) > 0 || r.Records != n {
		t.Error(r.Damage, err)
	}
}

// TestPackCutAnywhere cuts the power in each operation of compressing.
func TestPackCutAnywhere(t *testing.T) {
	for cut := 1; ; cut++ {
		d := newMemDisk(rand.New(rand.NewPCG(uint64(cut), 1)))
		bigBook(t, d, 300)
		all, _ := readAll(t, d)
		s := segmentFile{number: 1, name: "000001.jsonl"}
		d.ops, d.cutAt = 0, cut
		err := pack(context.Background(), d, s)
		if err == nil {
			if cut < 10 {
				t.Errorf("only %d operations", cut)
			}
			return
		}
		d = d.crash()
		if again, damage := readAll(t, d); !reflect.DeepEqual(again, all) || len(damage) > 0 {
			t.Fatalf("cut at %d: %d records of %d, %v", cut, len(again), len(all), damage)
		}
		if r, err := verify(d, true); err != nil || len(r.Damage) > 0 {
			t.Errorf("cut at %d: %v %v", cut, r.Damage, err)
		}
		b, err := open(d, Options{untidy: true})
		if err != nil {
			t.Fatal(err)
		}
		if seq, _ := b.Append(stampAt(0), "note", struct{}{}); seq != 301 {
			t.Errorf("cut at %d: goes on with record %d", cut, seq)
		}
		b.Close()
	}
}

func TestBackgroundCompression(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		d := newMemDisk(rand.New(rand.NewPCG(1, 1)))
		b, err := open(d, Options{SegmentBytes: 20_000, Compress: true})
		if err != nil {
			t.Fatal(err)
		}
		for i := range 1000 {
			b.Append(stampAt(time.Duration(i)), "reading", reading.Reading{Channel: "cell A", Value: float64(i), Status: reading.Good})
			<-time.After(10 * time.Millisecond)
		}
		if err := b.Close(); err != nil {
			t.Fatal(err)
		}
		c, _ := listContents(d)
		packed := 0
		for _, s := range c.segments {
			if s.packed {
				packed++
			}
		}
		if packed < len(c.segments)-2 || packed < 3 {
			t.Errorf("%d of %d segments are compressed", packed, len(c.segments))
		}
		if r, err := verify(d, true); err != nil || len(r.Damage) > 0 || r.Records != 1000 {
			t.Error(r.Records, r.Damage, err)
		}
	})
}

// TestFollow reads along while two programs write one after the other.
func TestFollow(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		d := newMemDisk(rand.New(rand.NewPCG(1, 1)))
		ctx, stop := context.WithCancel(context.Background())
		var got []uint64
		var damage []*Damage
		done := make(chan struct{})
		go func() {
			defer close(done)
			for rec, err := range follow(ctx, d, Filter{Kinds: []string{"note"}}) {
				if err != nil {
					damage = append(damage, AsDamage(err))
				} else {
					got = append(got, rec.Seq)
				}
			}
		}()
		n := 0
		for range 2 {
			b, err := open(d, Options{SegmentBytes: 5000, Compress: true})
			if err != nil {
				t.Fatal(err)
			}
			for range 200 {
				n++
				b.Append(stampAt(time.Duration(n)), "note", map[string]int{"n": n})
				<-time.After(37 * time.Millisecond)
			}
			synctest.Wait()
			if len(got) < n-10 {
				t.Errorf("%d of %d records were seen", len(got), n)
			}
			if err := b.Close(); err != nil {
				t.Fatal(err)
			}
		}
		<-time.After(time.Second)
		stop()
		<-done
		if len(got) != n || len(damage) > 0 {
			t.Errorf("%d records, expected %d; %v", len(got), n, damage)
		}
		for i, seq := range got {
			if seq != uint64(i+1) {
				t.Fatalf("record %d at place %d", seq, i+1)
			}
		}
	})
}
