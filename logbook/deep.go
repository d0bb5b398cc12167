package logbook

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"strings"
)

// checker parses records to the last byte.
type checker struct {
	segment  string
	day      [len("2026-12-01T")]byte // of the last sound t
	mentions []mention
}

// line reports what is wrong with a record whose envelope is sound.
func (c *checker) line(l line) error {
	if !c.sameDay(l.t) {
		if _, err := parseStamp(l.t); err != nil {
			return fmt.Errorf("t %q is no time: %w", l.t, err)
		}
		copy(c.day[:], l.t)
	}
	if !json.Valid(l.data) {
		return errors.New("its data is not JSON")
	}
	return nil
}

// names notes the files that a record names.
func (c *checker) names(l line) {
	if bytes.Contains(l.data, []byte(`"`+spectraDir+`/`)) {
		c.note(l)
	}
}

// mention is an attachment that a record names.
type mention struct {
	Attachment
	segment string
	seq     uint64
}

func (c *checker) note(l line) {
	var members map[string]json.RawMessage
	if json.Unmarshal(l.data, &members) != nil {
		return
	}
	for _, raw := range members {
		var a Attachment
		if json.Unmarshal(raw, &a) == nil && strings.HasPrefix(a.File, spectraDir+"/") {
			c.mentions = append(c.mentions, mention{a, c.segment, l.seq})
		}
	}
}

// verifyAttachments checks that every file that a record names is there and
// as it was.
func (r *Report) verifyAttachments(d disk) {
	for _, s := range r.Segments {
		for _, m := range s.mentions {
			damage := &Damage{Segment: m.segment, After: m.seq, Kind: Attached}
			content, err := readFile(d, m.File)
			if err != nil {
				damage.Text = fmt.Sprintf("record %d names %s: %v", m.seq, m.File, err)
				r.Damage = append(r.Damage, damage)
				continue
			}
			sum := sha256.Sum256(content)
			if got := hex.EncodeToString(sum[:]); got != m.SHA256 {
				damage.Text = fmt.Sprintf("%s has digest %s, record %d says %s", m.File, got, m.seq, m.SHA256)
				r.Damage = append(r.Damage, damage)
			}
		}
	}
}

// sameDay reports whether t is a time of the day that was seen last; that is
// quicker to find than whether it is a time at all.
func (c *checker) sameDay(t []byte) bool {
	if string(t[:len(c.day)]) != string(c.day[:]) {
		return false
	}
	two := func(i int) (n byte) {
		tens, ones := t[i]-'0', t[i+1]-'0'
		if tens > 9 || ones > 9 {
			return 100
		}
		return tens*10 + ones
	}
	return two(11) < 24 && two(14) < 60 && two(17) < 60 && two(20) < 100 && two(22) < 100 && two(24) < 100
}
