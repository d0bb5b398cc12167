package alarm

import (
	"fmt"
	"strings"
	"testing"
	"time"
)

// wholeTable is every state of the alarm state model of ANSI/ISA-18.2-2016 and
// IEC 62682:2022, A to I by their letters, against everything that can happen
// to an alarm (from memory of the standards, not copied from them). A small
// letter p behind a hidden state says that the process holds the condition. A
// dash changes nothing, a cross is refused.
//
// Where the standards leave a choice, ours is: a shelved or suppressed alarm
// comes back as the process is, unacknowledged where the condition holds;
// logic never hides a latching alarm that is not normal, or its latch would be
// lost; a person may take that out of service all the same.
const wholeTable = `
             raise clear ack reset shelve unshelve expire suppress unsuppress out in
plain A      B     -     x   x     G      x        -      H        -          I   x
plain B      -     D     C   x     Gp     x        -      Hp       -          Ip  x
plain C      -     A     x   x     Gp     x        -      Hp       -          Ip  x
plain D      B     -     A   x     G      x        -      H        -          I   x
plain G      Gp    -     x   x     G      A        A      -        -          I   x
plain Gp     -     G     x   x     Gp     B        B      -        -          Ip  x
plain H      Hp    -     x   x     x      x        -      -        A          I   x
plain Hp     -     H     x   x     x      x        -      -        B          Ip  x
plain I      Ip    -     x   x     x      x        -      -        -          x   A
plain Ip     -     I     x   x     x      x        -      -        -          x   B
latch A      B     -     x   x     x      x        -      H        -          I   x
latch B      -     E     C   x     x      x        -      -        -          Ip  x
latch C      -     F     x   x     x      x        -      -        -          Ip  x
latch E      B     -     F   x     x      x        -      -        -          I   x
latch F      B     -     x   A     x      x        -      -        -          I   x
latch H      Hp    -     x   x     x      x        -      -        A          I   x
latch Hp     -     H     x   x     x      x        -      -        B          Ip  x
latch I      Ip    -     x   x     x      x        -      -        -          x   A
latch Ip     -     I     x   x     x      x        -      -        -          x   B
`

// ways bring an alarm from normal into a state.
var ways = map[string]string{
	"A": "", "B": "raise", "C": "raise ack", "D": "raise clear", "E": "raise clear", "F": "raise ack clear",
	"G": "shelve", "Gp": "raise shelve", "H": "suppress", "Hp": "suppress raise", "I": "out", "Ip": "raise out",
}

// happen lets something happen to alarm a and reports whether it was refused.
func happen(l *List, what string) (refused bool, err error) {
	now := at(time.Second)
	switch what {
	case "raise":
		l.Evaluate("a", Present, now)
	case "clear":
		l.Evaluate("a", Absent, now)
	case "ack":
		_, err = l.Acknowledge("a", now)
	case "reset":
		_, err = l.Reset("a", now)
	case "shelve":
		_, err = l.Shelve("a", time.Minute, now)
	case "unshelve":
		_, err = l.Unshelve("a", now)
	case "expire":
		l.Tick(at(time.Hour))
	case "suppress":
		l.Suppress("a", true, now)
	case "unsuppress":
		l.Suppress("a", false, now)
	case "out":
		_, err = l.TakeOut("a", now)
	case "in":
		_, err = l.PutBack("a", now)
	default:
		return false, fmt.Errorf("%q is not known", what)
	}
	return err != nil, nil
}

// letter is the state as the table writes it.
func letter(l *List) string {
	_, e, _ := l.Get("a")
	text := string(rune('A' + int(e.State)))
	if e.State.Hidden() && e.Active {
		text += "p"
	}
	return text
}

func TestTheWholeTableOfTheStandard(t *testing.T) {
	lines := strings.Split(strings.TrimSpace(wholeTable), "\n")
	stimuli := strings.Fields(lines[0])
	cells := 0
	for _, line := range lines[1:] {
		fields := strings.Fields(line)
		latching, from := fields[0] == "latch", fields[1]
		for i, want := range fields[2:] {
			d := Definition{Name: "a", Latching: latching}
			if !latching {
				d.ShelveAtMost = time.Hour
			}
			l := list(t, d)
			for _, what := range strings.Fields(ways[from]) {
				if refused, err := happen(l, what); refused || err != nil {
					t.Fatalf("on the way to %s: %s refused %v, %v", from, what, refused, err)
				}
			}
			if got := letter(l); got != from {
				t.Fatalf("the way to %s led to %s", from, got)
			}
			refused, err := happen(l, stimuli[i])
			if err != nil {
				t.Fatal(err)
			}
			to := want
			if want == "-" || want == "x" {
				to = from
			}
			if got := letter(l); got != to || refused != (want == "x") {
				t.Errorf("%s %s, %s: %s, refused %v; want %s", fields[0], from, stimuli[i], got, refused, want)
			}
			cells++
		}
	}
	if want := 19 * 11; cells != want {
		t.Errorf("%d cells were tried, want %d", cells, want)
	}
}
