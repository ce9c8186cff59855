package report

import (
	"fmt"
	"hash/fnv"
	"io"
	"os"
	"path/filepath"
	"strings"
	"unicode"
)

// WriteFile writes a file whole or not at all: beside its place under a random
// name, synced, then renamed, and the folder synced. What stands in its place
// must be a regular file or nothing. On failure nothing is left behind.
func WriteFile(path string, write func(io.Writer) error) (err error) {
	if st, err := os.Lstat(path); err == nil && !st.Mode().IsRegular() {
		return fmt.Errorf("%s: is no regular file; move it away or give another folder with --out", path)
	}
	dir := filepath.Dir(path)
	f, err := os.CreateTemp(dir, "."+filepath.Base(path)+"-*")
	if err != nil {
		return err
	}
	whole := false
	defer func() { // also where write panics
		if !whole {
			f.Close()
			os.Remove(f.Name())
		}
	}()
	if err = write(f); err != nil {
		return err
	}
	if err = f.Chmod(0o644); err != nil {
		return err
	}
	if err = f.Sync(); err != nil {
		return err
	}
	if err = f.Close(); err != nil {
		return err
	}
	if err = os.Rename(f.Name(), path); err != nil {
		return err
	}
	whole = true
	if d, derr := os.Open(dir); derr == nil {
		_ = d.Sync() // not every file system can
		d.Close()
	}
	return nil
}

// SafeName turns a unit's name into a file name without an extension: letters,
// digits, dot, dash and underscore, never a path, a hidden file or a reserved
// name. A name that had to be changed carries a hash of the original, so that two
// units never share a file.
func SafeName(unit string) string {
	var b strings.Builder
	for _, r := range unit {
		switch {
		case r < 128 && (unicode.IsLetter(r) || unicode.IsDigit(r)) || r == '-' || r == '_' || r == '.':
			b.WriteRune(r)
		default:
			b.WriteByte('_')
		}
	}
	s := strings.TrimLeft(b.String(), ".")
	if len(s) > 80 {
		s = s[:80]
	}
	base, _, _ := strings.Cut(strings.ToUpper(s), ".")
	reserved := false
	switch base {
	case "CON", "PRN", "AUX", "NUL", "COM1", "COM2", "COM3", "COM4", "COM5", "COM6", "COM7", "COM8", "COM9",
		"LPT1", "LPT2", "LPT3", "LPT4", "LPT5", "LPT6", "LPT7", "LPT8", "LPT9":
		reserved = true
	}
	if s == unit && s != "" && !reserved && !strings.HasSuffix(s, ".") {
		return s
	}
	h := fnv.New32a()
	h.Write([]byte(unit))
	return fmt.Sprintf("%s-%08x", strings.TrimRight(s, "."), h.Sum32())
}
