package record

import (
	"fmt"
	"io"
	"io/fs"
)

// Open reads a record from a file of a file system. What the file is shows in
// its first bytes, not in its name.
func Open(fsys fs.FS, name string, opt Options) (*Record, error) {
	f, err := fsys.Open(name)
	if err != nil {
		return nil, err
	}
	defer func() { _ = f.Close() }() // only read
	if info, err := f.Stat(); err == nil && info.IsDir() {
		return nil, &Error{Code: "not-a-table", What: "this is a folder", Hint: "name a file in it"}
	}
	r, ok := f.(io.ReadSeeker)
	if !ok {
		return nil, fmt.Errorf("%s: the file cannot be read twice", name)
	}
	return Read(r, opt)
}

// Read reads a record: a WAV file where it begins like one, else a table.
func Read(r io.ReadSeeker, opt Options) (*Record, error) {
	var first [4]byte
	n, err := io.ReadFull(r, first[:])
	if err != nil && n == 0 {
		return nil, &Error{Code: "empty-record", What: "the file is empty"}
	}
	switch string(first[:n]) {
	case "RIFF":
		return ReadWAV(r, opt)
	case "RIFX", "RF64":
		return nil, &Error{Code: "unknown-wav", What: fmt.Sprintf("a WAV file of the kind %s is not read", first[:n]), Hint: "write it as a plain WAV file (RIFF), or as CSV"}
	}
	if _, err := r.Seek(0, io.SeekStart); err != nil {
		return nil, err
	}
	return ReadCSV(r, opt)
}
