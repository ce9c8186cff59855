package ingest

import (
	"archive/zip"
	"context"
	"errors"
	"fmt"
	"io"
	"path"
	"strings"
)

// maxZipEntries bounds the files that one zip archive is read for.
const maxZipEntries = 10_000

// unzip puts the trend files of every zip archive in the archive's place. One that
// cannot be read stays, with why.
func (in *input) unzip(ctx context.Context) error {
	var out []*fileRef
	for _, f := range in.files {
		if err := ctx.Err(); err != nil {
			return err
		}
		if !f.isZip() {
			out = append(out, f)
			continue
		}
		list, ignored, err := f.entries()
		if err != nil {
			f.bad = err
			out = append(out, f)
			continue
		}
		out = append(out, list...)
		in.ignored = append(in.ignored, ignored...)
	}
	in.files = out
	return nil
}

// isZip goes by the name, or for standard input by the first bytes.
func (f *fileRef) isZip() bool {
	if f.spool != nil {
		magic := make([]byte, 4)
		_, err := f.spool.ReadAt(magic, 0)
		return err == nil && string(magic) == "PK\x03\x04"
	}
	return strings.HasSuffix(strings.ToLower(f.name), ".zip")
}

// entries lists the trend files in a zip archive.
func (f *fileRef) entries() (list []*fileRef, ignored []string, err error) {
	file, err := f.open()
	if err != nil {
		return nil, nil, readable(err)
	}
	defer file.Close()
	z, err := zip.NewReader(file, f.size)
	if err != nil {
		return nil, nil, fmt.Errorf("not a whole zip archive: %w", err)
	}
	if len(z.File) > maxZipEntries {
		return nil, nil, fmt.Errorf("the zip archive has %d files in it; at most %d are read", len(z.File), maxZipEntries)
	}
	for i, e := range z.File {
		// The name is shown and matched, never opened: but it shall not look as if it
		// led out of the archive.
		name := strings.TrimPrefix(path.Clean("/"+strings.ReplaceAll(e.Name, "\\", "/")), "/")
		base := path.Base(name)
		if e.FileInfo().IsDir() || strings.HasPrefix(base, ".") || strings.HasPrefix(name, "__MACOSX/") {
			continue
		}
		shown := path.Join(f.name, name)
		if _, ok := trendName(name); !ok {
			ignored = append(ignored, shown)
			continue
		}
		list = append(list, &fileRef{name: shown, root: f.root, path: f.path, spool: f.spool, size: int64(min(e.UncompressedSize64, 1<<40)), archive: f.size, entry: i + 1})
	}
	if len(list) == 0 {
		return nil, nil, errors.New("the zip archive has no trend file in it")
	}
	return list, ignored, nil
}

// openEntry opens the file's place in its zip archive for one pass.
func (f *fileRef) openEntry(file storedFile) (io.ReadCloser, error) {
	z, err := zip.NewReader(file, f.archive)
	if err != nil {
		return nil, fmt.Errorf("not a whole zip archive: %w", err)
	}
	if f.entry > len(z.File) {
		return nil, errors.New("the zip archive has changed")
	}
	e := z.File[f.entry-1]
	if e.Flags&1 != 0 {
		return nil, errors.New("it is encrypted in the zip archive")
	}
	return e.Open()
}
