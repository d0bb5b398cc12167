package simulate

import (
	"fmt"
	"strconv"
	"strings"
	"time"
)

// Timed is a fault and the bench time at which it comes.
type Timed struct {
	At    time.Duration
	Fault Fault
}

// ParseTimed reads a fault as a person writes it: the time, the kind, and
// perhaps the place and the size or the word over, such as "60s leak",
// "90s leak cell A 0.2" or "2m shutter over".
func ParseTimed(text string) (Timed, error) {
	words := strings.Fields(text)
	if len(words) < 2 {
		return Timed{}, fmt.Errorf("fault %q: expected a time and a kind, such as \"60s leak\"", text)
	}
	at, err := time.ParseDuration(words[0])
	if err != nil || at < 0 {
		return Timed{}, fmt.Errorf("fault %q: its time is %q, expected a bench time above zero such as 60s", text, words[0])
	}
	t := Timed{At: at}
	if t.Fault.Kind, err = parseKind(words[1]); err != nil {
		return Timed{}, fmt.Errorf("fault %q: %w", text, err)
	}
	rest := words[2:]
	if last := len(rest) - 1; last >= 0 {
		if rest[last] == "over" {
			t.Fault.Over, rest = true, rest[:last]
		} else if size, err := strconv.ParseFloat(rest[last], 64); err == nil {
			t.Fault.Size, rest = size, rest[:last]
		}
	}
	t.Fault.Where = strings.Join(rest, " ")
	if t.Fault, err = t.Fault.checked(); err != nil {
		return Timed{}, err
	}
	return t, nil
}

func parseKind(text string) (Kind, error) {
	var names []string
	for k := range kindCount {
		if k.String() == text {
			return k, nil
		}
		names = append(names, k.String())
	}
	return 0, fmt.Errorf("kind %q: expected one of %s", text, strings.Join(names, ", "))
}
