//go:build unix

package logbook

import (
	"crypto/sha256"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"sync"
	"testing"
	"time"

	"golang.org/x/sys/unix"

	"barline/model/reading"
)

// BenchmarkAppend appends readings without pause, about 135 bytes each, to a
// real folder. Memory is large enough for all that waits.
func BenchmarkAppend(b *testing.B) {
	book, err := Open(b.TempDir(), Options{MemoryBytes: 1 << 30})
	if err != nil {
		b.Fatal(err)
	}
	defer book.Close()
	r := reading.Reading{Channel: "cell A", Role: reading.CellAPressure, Status: reading.Good}
	b.ReportAllocs()
	before := cpu()
	b.ResetTimer()
	for i := range b.N {
		r.Value = 9e5 + float64(i%1000)*0.25
		if _, err := book.Append(stampAt(time.Duration(i)*time.Microsecond), "reading", &r); err != nil {
			b.Fatal(err)
		}
	}
	b.StopTimer()
	b.ReportMetric(float64(b.N)/b.Elapsed().Seconds(), "records/s")
	b.ReportMetric(float64(b.N)/(cpu()-before).Seconds(), "records/cpu-s") // writing them included
}

// cpu returns the processor time that this process has used. On a machine that
// others use too, rates against it say more than rates against the clock.
func cpu() time.Duration {
	var u unix.Rusage
	if err := unix.Getrusage(unix.RUSAGE_SELF, &u); err != nil {
		return 0
	}
	return time.Duration(u.Utime.Nano() + u.Stime.Nano())
}

// manyRecords is the size of the logbook that the reading benchmarks use:
// BARLINE_RECORDS, else a million.
func manyRecords(b *testing.B) int {
	n := 1_000_000
	if s := os.Getenv("BARLINE_RECORDS"); s != "" {
		var err error
		if n, err = strconv.Atoi(s); err != nil {
			b.Fatal(err)
		}
	}
	return n
}

// fill writes n records of eight channels at 10 Hz, and closes the logbook.
func fill(b *testing.B, dir string, n int) {
	book, err := Open(dir, Options{MemoryBytes: 256 << 20})
	if err != nil {
		b.Fatal(err)
	}
	random := rand.New(rand.NewPCG(1, 1))
	var channels [8]reading.Reading
	for i := range channels {
		channels[i] = reading.Reading{Channel: fmt.Sprintf("channel %d", i), Role: reading.CellAPressure, Status: reading.Good}
	}
	for i := range n {
		r := &channels[i%len(channels)]
		r.Value = 9e5 + float64(random.IntN(100_000))/64
		if _, err := book.Append(stampAt(time.Duration(i)*12500*time.Microsecond), "reading", r); err != nil {
			b.Fatal(err)
		}
		if i%100_000 == 0 {
			if err := book.Sync(); err != nil {
				b.Fatal(err)
			}
		}
	}
	if err := book.Close(); err != nil {
		b.Fatal(err)
	}
}

// BenchmarkRead makes one logbook and asks it in several ways.
func BenchmarkRead(b *testing.B) {
	n := manyRecords(b)
	dir := b.TempDir()
	fill(b, dir, n)
	names, err := filepath.Glob(filepath.Join(dir, "*.jsonl"))
	if err != nil {
		b.Fatal(err)
	}
	total := int64(0)
	for _, name := range names {
		info, err := os.Stat(name)
		if err != nil {
			b.Fatal(err)
		}
		total += info.Size()
	}
	b.Logf("%d records, %d bytes, %d segments", n, total, len(names))

	// The floor under verify: the digest alone of the same bytes, as parallel.
	b.Run("digest-alone", func(b *testing.B) {
		b.SetBytes(total)
		before := cpu()
		defer func() { b.ReportMetric(float64(b.N)*float64(total)/1e6/(cpu()-before).Seconds(), "MB/cpu-s") }()
		for range b.N {
			var wait sync.WaitGroup
			next := make(chan string)
			for range runtime.GOMAXPROCS(0) {
				wait.Go(func() {
					for name := range next {
						f, err := os.Open(name)
						if err != nil {
							b.Error(err)
							continue
						}
						io.CopyBuffer(sha256.New(), struct{ io.Reader }{f}, make([]byte, walkMost))
						f.Close()
					}
				})
			}
			for _, name := range names {
				next <- name
			}
			close(next)
			wait.Wait()
		}
	})
	verifying := func(deep bool) func(*testing.B) {
		return func(b *testing.B) {
			b.SetBytes(total)
			before := cpu()
			defer func() { b.ReportMetric(float64(b.N)*float64(total)/1e6/(cpu()-before).Seconds(), "MB/cpu-s") }()
			for range b.N {
				r, err := Verify(dir, deep)
				if err != nil || len(r.Damage) > 0 || r.Records != uint64(n) {
					b.Fatal(r.Records, r.Damage, err)
				}
			}
		}
	}
	b.Run("verify", verifying(false))
	b.Run("verify-deep", verifying(true))
	for range Records(dir, Filter{From: testStart, To: testStart}) {
	}
	b.Run("locate-1000", func(b *testing.B) {
		random := rand.New(rand.NewPCG(2, 2))
		for range b.N {
			found := 0
			from := testStart.Add(time.Duration(random.IntN(n-2000)) * 12500 * time.Microsecond)
			for rec, err := range Records(dir, Filter{From: from}) {
				var d struct {
					Channel string
					Value   float64
				}
				if err == nil {
					err = rec.Decode(&d)
				}
				if err != nil {
					b.Fatal(err)
				}
				if found++; found == 1000 {
					break
				}
			}
		}
	})
}
