package logbook

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io/fs"
	"strings"
)

// Attachment names a file beside the record, as the record does: a member such
// as "spectrum" holds it.
type Attachment struct {
	File   string `json:"file"` // below the logbook's folder, with forward slashes
	SHA256 string `json:"sha256"`
	Bytes  int    `json:"bytes"`
}

// Attach keeps content as a file beside the record, named by its digest, and
// returns what the record is to say of it. Suffix, such as ".csv", ends the
// name. The same content is kept once. It waits for the disk, so it is not for
// the loop that reads instruments.
func (b *Book) Attach(content []byte, suffix string) (Attachment, error) {
	select {
	case <-b.done:
		return Attachment{}, ErrClosed
	default:
	}
	return attach(b.disk, content, suffix)
}

func attach(d disk, content []byte, suffix string) (a Attachment, err error) {
	if strings.ContainsAny(suffix, `/\`) || len(suffix) > 16 {
		return a, fmt.Errorf("logbook: suffix %q, expected one such as \".csv\"", suffix)
	}
	sum := sha256.Sum256(content)
	digest := hex.EncodeToString(sum[:])
	a = Attachment{File: spectraDir + "/" + digest + suffix, SHA256: digest, Bytes: len(content)}
	if err := d.makeDir(spectraDir); err != nil {
		return a, err
	}
	part := a.File + partSuffix
	if err := d.remove(part); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return a, err
	}
	f, err := d.create(part)
	if err != nil {
		return a, err
	}
	if _, err = f.WriteAt(content, 0); err == nil {
		err = f.Sync()
	}
	if err = errors.Join(err, f.Close()); err != nil {
		d.remove(part)
		return a, err
	}
	if err := d.rename(part, a.File); err != nil {
		return a, err
	}
	return a, errors.Join(d.syncDir(spectraDir), d.syncDir(""))
}

// ReadAttachment returns the content of a file that a record of the logbook in dir
// names. It refuses one that is not as the record says.
func ReadAttachment(dir string, a Attachment) ([]byte, error) {
	if !strings.HasPrefix(a.File, spectraDir+"/") || strings.Contains(a.File[len(spectraDir)+1:], "/") {
		return nil, fmt.Errorf("logbook: file %q, expected one in %s", a.File, spectraDir)
	}
	content, err := readFile(folder(dir), a.File)
	if err != nil {
		return nil, fmt.Errorf("logbook: %w", err)
	}
	sum := sha256.Sum256(content)
	if got := hex.EncodeToString(sum[:]); got != a.SHA256 {
		return nil, fmt.Errorf("logbook: %s has digest %s, the record says %s", a.File, got, a.SHA256)
	}
	return content, nil
}
