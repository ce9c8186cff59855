package ingest

import (
	"bufio"
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"hash"
	"io"
	"io/fs"
	"os"
	"path"
	"path/filepath"
	"sort"
	"strings"
	"unicode/utf16"
	"unicode/utf8"

	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"
)

// Limits on what a stranger's file may ask of the machine.
const (
	maxInflated   = 16 << 30  // bytes that one compressed file may unpack to
	maxZstdMemory = 256 << 20 // bytes that a zstd window may take
)

// Format is the shape of a trend file, under its compression.
type Format string

// The formats.
const (
	FormatCSV     Format = "csv"
	FormatParquet Format = "parquet"
)

// fileRef is a trend file that has been found and not yet read.
type fileRef struct {
	name  string   // as shown: relative to the site or the command line
	root  string   // folder that the path may not lead out of; empty: a path the user typed
	path  string   // under root, slash-separated, or as typed
	spool *os.File // standard input, kept in an unlinked file
	size  int64    // unpacked, where it stands in a zip archive

	entry   int   // 1-based place in a zip archive; 0: not in one
	archive int64 // size of the archive
	bad     error // why it cannot be read, where that is known already
}

// open opens the file as it is stored.
func (f *fileRef) open() (storedFile, error) {
	switch {
	case f.spool != nil:
		return spooled{io.NewSectionReader(f.spool, 0, f.size)}, nil
	case f.root != "":
		return os.OpenInRoot(f.root, filepath.FromSlash(f.path))
	}
	return os.Open(f.path)
}

type storedFile interface {
	io.ReadCloser
	io.ReaderAt
	io.Seeker
}

type spooled struct{ *io.SectionReader }

func (spooled) Close() error { return nil }

// packing is how a file is compressed.
type packing uint8

const (
	plain packing = iota
	gzipped
	zstandard
)

func packingOf(magic []byte) packing {
	switch {
	case bytes.HasPrefix(magic, []byte{0x1f, 0x8b}):
		return gzipped
	case bytes.HasPrefix(magic, []byte{0x28, 0xb5, 0x2f, 0xfd}):
		return zstandard
	}
	return plain
}

// stream is a file's content, unpacked, and the hash of its stored bytes (of what
// stands in a zip archive, its bytes outside).
type stream struct {
	io.Reader
	file  storedFile
	sum   hash.Hash
	count *countReader
	close func()
}

// openStream opens f for one pass from its beginning. Where hashed, the bytes
// are summed on the way; Finish reads what is left and gives the sum.
func openStream(ctx context.Context, f *fileRef, hashed bool) (*stream, error) {
	if f.bad != nil {
		return nil, f.bad
	}
	file, err := f.open()
	if err != nil {
		return nil, readable(err)
	}
	s := &stream{file: file, close: func() {}}
	var stored io.Reader = file
	if f.entry > 0 {
		e, err := f.openEntry(file)
		if err != nil {
			file.Close()
			return nil, err
		}
		s.close = func() { e.Close() }
		stored = &capped{r: e, left: maxInflated}
	}
	s.count = &countReader{r: stored, ctx: ctx}
	var r io.Reader = s.count
	if hashed {
		s.sum = sha256.New()
		r = io.TeeReader(r, s.sum)
	}
	b := bufio.NewReaderSize(r, 64<<10)
	magic, _ := b.Peek(4)
	var in io.Reader = b
	switch packingOf(magic) {
	case gzipped:
		z, err := gzip.NewReader(b)
		if err != nil {
			file.Close()
			return nil, fmt.Errorf("not a whole gzip file: %w", err)
		}
		in = &capped{r: z, left: maxInflated}
	case zstandard:
		z, err := zstd.NewReader(b, zstd.WithDecoderConcurrency(1), zstd.WithDecoderMaxMemory(maxZstdMemory), zstd.WithDecoderMaxWindow(maxZstdMemory/2))
		if err != nil {
			file.Close()
			return nil, fmt.Errorf("not a whole zstd file: %w", err)
		}
		inner := s.close
		s.close = func() { z.Close(); inner() }
		in = &capped{r: z, left: maxInflated}
	}
	s.Reader = in
	return s, nil
}

// Finish reads the stored bytes to their end, for the hash, and closes.
func (s *stream) Finish() (bytes int64, sha string, err error) {
	defer s.Close()
	if s.sum == nil {
		return s.count.n, "", nil
	}
	if _, err := io.Copy(s.sum, s.count); err != nil {
		return 0, "", err
	}
	return s.count.n, hex.EncodeToString(s.sum.Sum(nil)), nil
}

// Close releases the file.
func (s *stream) Close() error {
	s.close()
	return s.file.Close()
}

type countReader struct {
	r   io.Reader
	n   int64
	ctx context.Context
}

func (c *countReader) Read(p []byte) (int, error) {
	if err := c.ctx.Err(); err != nil {
		return 0, err
	}
	n, err := c.r.Read(p)
	c.n += int64(n)
	return n, err
}

var errTooLarge = fmt.Errorf("unpacks to more than %d GiB", maxInflated>>30)

type capped struct {
	r    io.Reader
	left int64
}

func (c *capped) Read(p []byte) (int, error) {
	if c.left <= 0 {
		return 0, errTooLarge
	}
	if int64(len(p)) > c.left {
		p = p[:c.left]
	}
	n, err := c.r.Read(p)
	c.left -= int64(n)
	return n, err
}

// textReader gives the stream as UTF-8 without a byte order mark.
func textReader(r io.Reader) io.Reader {
	b := bufio.NewReaderSize(r, 64<<10)
	m, _ := b.Peek(3)
	switch {
	case bytes.HasPrefix(m, []byte{0xef, 0xbb, 0xbf}):
		b.Discard(3)
	case bytes.HasPrefix(m, []byte{0xff, 0xfe}), bytes.HasPrefix(m, []byte{0xfe, 0xff}):
		b.Discard(2)
		return &wideReader{r: b, big: m[0] == 0xfe}
	case len(m) >= 2 && m[0] != 0 && m[1] == 0: // two bytes a letter, no mark
		return &wideReader{r: b}
	}
	return b
}

// wideReader turns UTF-16 into UTF-8.
type wideReader struct {
	r    *bufio.Reader
	big  bool
	pend []byte
}

func (w *wideReader) Read(p []byte) (int, error) {
	for len(w.pend) == 0 {
		u, err := w.unit()
		if err != nil {
			return 0, err
		}
		c := rune(u)
		if utf16.IsSurrogate(c) {
			low, err := w.unit()
			if err != nil {
				return 0, err
			}
			c = utf16.DecodeRune(c, rune(low))
		}
		w.pend = utf8.AppendRune(w.pend[:0], c)
	}
	n := copy(p, w.pend)
	w.pend = w.pend[n:]
	return n, nil
}

func (w *wideReader) unit() (uint16, error) {
	a, err := w.r.ReadByte()
	if err != nil {
		return 0, err
	}
	b, err := w.r.ReadByte()
	if err != nil {
		return 0, io.EOF
	}
	if w.big {
		return uint16(a)<<8 | uint16(b), nil
	}
	return uint16(b)<<8 | uint16(a), nil
}

// spool copies r into a file of its own that is gone when the process ends.
func spool(ctx context.Context, r io.Reader) (*os.File, int64, error) {
	f, err := os.CreateTemp("", "trend-*")
	if err != nil {
		return nil, 0, err
	}
	os.Remove(f.Name()) // the open file stays readable; where it does not, the system's clean-up has it
	n, err := io.Copy(f, &countReader{r: r, ctx: ctx})
	if err != nil {
		f.Close()
		return nil, 0, err
	}
	return f, n, nil
}

// readable puts an error of the file system into words without the path, which
// messages carry already.
func readable(err error) error {
	var pe *fs.PathError
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return errors.New("no such file or folder")
	case errors.Is(err, fs.ErrPermission):
		return errors.New("permission denied")
	case errors.As(err, &pe):
		return pe.Err
	}
	return err
}

// trendName reports whether a file name is one that trends go under, and its
// stem.
func trendName(name string) (stem string, ok bool) {
	stem = path.Base(filepath.ToSlash(name))
	low := strings.ToLower(stem)
	for _, z := range []string{".gz", ".zst"} {
		if strings.HasSuffix(low, z) {
			stem, low = stem[:len(stem)-len(z)], low[:len(low)-len(z)]
			break
		}
	}
	for _, e := range []string{".csv", ".tsv", ".txt", ".parquet", ".pq", ".zip"} {
		if strings.HasSuffix(low, e) && len(low) > len(e) {
			return stem[:len(stem)-len(e)], true
		}
	}
	return stem, false
}

// walk lists the trend files of a folder, sorted by name, never leaving it.
// shown is put before each name.
func walk(ctx context.Context, dir, shown string) (files []*fileRef, ignored []string, err error) {
	root, err := os.OpenRoot(dir)
	if err != nil {
		return nil, nil, readable(err)
	}
	defer root.Close()
	err = fs.WalkDir(root.FS(), ".", func(p string, d fs.DirEntry, err error) error {
		if err != nil {
			if p == "." {
				return readable(err)
			}
			ignored = append(ignored, p)
			return nil
		}
		if ctx.Err() != nil {
			return ctx.Err()
		}
		base := path.Base(p)
		if p != "." && strings.HasPrefix(base, ".") {
			if d.IsDir() {
				return fs.SkipDir
			}
			return nil
		}
		if d.IsDir() {
			return nil
		}
		st, err := root.Stat(filepath.FromSlash(p)) // follows a link only inside the folder
		if _, ok := trendName(p); !ok || err != nil || !st.Mode().IsRegular() {
			ignored = append(ignored, p)
			return nil
		}
		files = append(files, &fileRef{name: path.Join(shown, p), root: dir, path: p, size: st.Size()})
		return nil
	})
	sort.Slice(files, func(i, j int) bool { return files[i].name < files[j].name })
	return files, ignored, err
}
