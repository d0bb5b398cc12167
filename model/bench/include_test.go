package bench

import (
	"errors"
	"fmt"
	"os"
	"strings"
	"testing"
)

// apart is the sample with its instruments in files of their own.
func apart(t *testing.T) (text string, files map[string]string) {
	t.Helper()
	sample := string(Sample())
	head, rest, _ := strings.Cut(sample, "[[instrument]]\nname = \"gauges\"")
	gauges, rest, _ := strings.Cut(rest, "[[instrument]]\nname = \"controller\"")
	others, tail, ok := strings.Cut(rest, "[emission]")
	if !ok {
		t.Fatal("the sample has another order")
	}
	return "include = [\"gauges.toml\", \"others.toml\"]  # ours\n" + head + "[emission]" + tail, map[string]string{
		"gauges.toml": "# the gauges\n[[instrument]]\nname = \"gauges\"" + gauges,
		"others.toml": "[[instrument]]\nname = \"controller\"" + strings.TrimRight(others, "\n"), // no end of line
	}
}

func reader(files map[string]string) func(string) ([]byte, error) {
	return func(file string) ([]byte, error) {
		text, ok := files[file]
		if !ok {
			return nil, fmt.Errorf("%s: %w", file, os.ErrNotExist)
		}
		return []byte(text), nil
	}
}

func TestIncludedInstrumentsAreThoseOfTheBench(t *testing.T) {
	text, files := apart(t)
	j, err := Join([]byte(text), "bench.toml", reader(files))
	if err != nil {
		t.Fatal(err)
	}
	b, err := j.Parse()
	if err != nil {
		t.Fatal(err)
	}
	whole, err := Parse(Sample(), "sample.toml")
	if err != nil {
		t.Fatal(err)
	}
	if len(b.Instrument) != len(whole.Instrument) || b.Instrument[0].Channel[1].Name != whole.Instrument[0].Channel[1].Name {
		t.Errorf("%d instruments, want %d", len(b.Instrument), len(whole.Instrument))
	}
	// The joined text stands by itself, and joining it again changes nothing.
	again, err := Join(j.Text, "configuration in the record", reader(nil))
	if err != nil || string(again.Text) != string(j.Text) {
		t.Errorf("joined twice: %v", err)
	}
	if _, err := Parse(j.Text, "configuration in the record"); err != nil {
		t.Error(err)
	}
	// A file that was not joined is refused and not read without instruments.
	if _, err := Parse([]byte(text), "bench.toml"); err == nil || !strings.Contains(err.Error(), "include") {
		t.Errorf("not joined: %v", err)
	}
}

func TestMistakesOfIncludedFilesAreNamedThere(t *testing.T) {
	for _, c := range []struct {
		name         string
		change       func(text *string, files map[string]string)
		want, unwant string
	}{
		{"of the bench file", func(text *string, _ map[string]string) {
			*text = strings.Replace(*text, `loss = "1 dB/m"`, `los = "1 dB/m"`, 1)
		}, "bench.toml:16:1: fibre.los", ""},
		{"a key", func(_ *string, f map[string]string) {
			f["gauges.toml"] = strings.Replace(f["gauges.toml"], "baud =", "bauds =", 1)
		}, "gauges.toml:6:1: instrument.bauds", "bench.toml"},
		{"a value", func(_ *string, f map[string]string) {
			f["others.toml"] = strings.Replace(f["others.toml"], `"scpi"`, `"skpi"`, 1)
		}, "others.toml:3:12: instrument.protocol", ""},
		{"syntax", func(_ *string, f map[string]string) {
			f["others.toml"] = "[[instrument]]\nname = panel\n"
		}, "others.toml:2:", "bench.toml"},
		{"another section", func(_ *string, f map[string]string) {
			f["gauges.toml"] += "\n[alarms]\non_alarm = []\n"
		}, "alarms is not a section of a file of instruments", ""},
		{"an include of its own", func(_ *string, f map[string]string) {
			f["gauges.toml"] = "include = [\"more.toml\"]\n" + f["gauges.toml"]
		}, "gauges.toml:1:1: include is not a section", ""},
		{"a file that is not there", func(_ *string, f map[string]string) { delete(f, "others.toml") }, "bench.toml:1:1: include: others.toml", ""},
		{"twice", func(text *string, _ map[string]string) {
			*text = strings.Replace(*text, "others.toml", "gauges.toml", 1)
		}, "stands there twice", ""},
		{"over several lines", func(text *string, _ map[string]string) {
			*text = strings.Replace(*text, `["gauges.toml", `, "[\"gauges.toml\",\n", 1)
		}, "bench.toml:1:1: include: expected one line", ""},
		{"no list", func(text *string, _ map[string]string) {
			*text = strings.Replace(*text, `["gauges.toml", "others.toml"]`, `7`, 1)
		}, "bench.toml:1:1: include: expected one line", ""},
		{"a name taken", func(_ *string, f map[string]string) {
			f["others.toml"] = strings.Replace(f["others.toml"], `name = "controller"`, `name = "gauges"`, 1)
		}, "others.toml:2:8: instrument.name", ""},
	} {
		t.Run(c.name, func(t *testing.T) {
			text, files := apart(t)
			c.change(&text, files)
			j, err := Join([]byte(text), "bench.toml", reader(files))
			if err == nil {
				_, err = j.Parse()
			}
			var found Mistakes
			if !errors.As(err, &found) || !strings.Contains(err.Error(), c.want) {
				t.Fatalf("got %v, want %q", err, c.want)
			}
			if c.unwant != "" && strings.Contains(err.Error(), c.unwant) {
				t.Errorf("got %v, which names %q", err, c.unwant)
			}
		})
	}
}

// Whatever the bench file and what it includes say, joining them ends in a
// bench or in mistakes.
func FuzzJoin(f *testing.F) {
	f.Add("include = [\"a\"]\n", "[[instrument]]\nname = \"g\"\n")
	f.Add("include = [\"a\", \"a\"]", "")
	f.Add("include=[]\n[bench]\n", "include = 7")
	f.Fuzz(func(t *testing.T, text, more string) {
		j, err := Join([]byte(text), "bench.toml", func(string) ([]byte, error) { return []byte(more), nil })
		if err == nil {
			_, err = j.Parse()
		}
		var found Mistakes
		if err != nil && !errors.As(err, &found) {
			t.Fatalf("%T: %v", err, err)
		}
	})
}
