package store

import (
	"encoding/json"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
)

// Folder is everything that a result folder holds.
type Folder struct {
	Result   []byte // result.json
	Timing   []byte // timing.json: the only file with clock times in it
	Scenario []byte // scenario.taut, as run
	Log      []byte // log.jsonl
	Series   Table
	// SeriesName is what the table's files are called; "": series. A folder of
	// another name needs no table.
	SeriesName string
	Pictures   []Picture
}

// Table is a set of columns of equal length; the first is the time.
type Table struct {
	Columns []Column
}

// Column is one named column; NaN stands for a value that does not exist.
type Column struct {
	Name   string // with its unit in brackets
	Values []float64
}

// Picture is a quantity over place and time.
type Picture struct {
	Watch  string
	Name   string    // of the column, with its unit in brackets
	X      []float64 // m
	Time   []float64 // s
	Values [][]float64
}

// ErrForeign is wrapped where a folder stands in the way that tautspan did not
// write from the same scenario file.
var ErrForeign = errors.New("is no result of this scenario file")

// Write puts the folder at dir. A result of the same scenario file (file, its
// base name) that stands there is kept as dir + ".before", replacing an older
// one; anything else in the way is an error unless force is set.
func Write(dir, file string, f *Folder, force bool) (err error) {
	dir = filepath.Clean(dir)
	if err := Permitted(dir, file, force); err != nil {
		return err
	}
	parent := filepath.Dir(dir)
	if err := os.MkdirAll(parent, 0o755); err != nil {
		return err
	}
	tmp, err := os.MkdirTemp(parent, "."+filepath.Base(dir)+".part-*")
	if err != nil {
		return err
	}
	defer func() {
		if err != nil {
			err = errors.Join(err, os.RemoveAll(tmp))
		}
	}()
	if err := os.Chmod(tmp, 0o755); err != nil {
		return err
	}
	if err := f.writeAll(tmp); err != nil {
		return err
	}
	return swap(tmp, dir)
}

// Permitted tells whether dir may be (re)placed by a result of the scenario file.
func Permitted(dir, file string, force bool) error {
	switch _, err := os.Lstat(dir); {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return err
	case force:
		return nil
	}
	if from, err := SourceFile(dir); err != nil || from != filepath.Base(file) {
		return fmt.Errorf("%s stands in the way and %w; say --force to replace it, or --out to write elsewhere", dir, ErrForeign)
	}
	return nil
}

// SourceFile is the base name of the scenario file that a result folder was
// made from.
func SourceFile(dir string) (string, error) {
	data, err := os.ReadFile(filepath.Join(dir, "result.json"))
	if err != nil {
		return "", err
	}
	var doc struct {
		Format   int
		Scenario struct{ File string }
	}
	if err := json.Unmarshal(data, &doc); err != nil {
		return "", err
	}
	if doc.Format == 0 || doc.Scenario.File == "" {
		return "", errors.New("no result document")
	}
	return filepath.Base(doc.Scenario.File), nil
}

// swap moves tmp to dir and what stood there to dir.before.
func swap(tmp, dir string) error {
	before := dir + ".before"
	if _, err := os.Lstat(dir); err == nil {
		if err := os.RemoveAll(before); err != nil {
			return err
		}
		if err := os.Rename(dir, before); err != nil {
			return err
		}
		if err := os.Rename(tmp, dir); err != nil {
			return errors.Join(err, os.Rename(before, dir))
		}
		return nil
	}
	return os.Rename(tmp, dir)
}

func (f *Folder) writeAll(dir string) error {
	for _, file := range []struct {
		name string
		data []byte
	}{{"result.json", f.Result}, {"timing.json", f.Timing}, {"scenario.taut", f.Scenario}, {"log.jsonl", f.Log}} {
		if err := os.WriteFile(filepath.Join(dir, file.name), file.data, 0o644); err != nil {
			return err
		}
	}
	name := f.SeriesName
	if name == "" {
		name = "series"
	}
	if f.SeriesName == "" || len(f.Series.Columns) > 0 {
		if err := toFile(filepath.Join(dir, name+".csv"), f.Series.writeCSV); err != nil {
			return err
		}
		if err := toFile(filepath.Join(dir, name+".parquet"), f.Series.writeParquet); err != nil {
			return err
		}
	}
	for i := range f.Pictures {
		p := &f.Pictures[i]
		if err := toFile(filepath.Join(dir, "field-"+p.Watch+".parquet"), p.writeParquet); err != nil {
			return err
		}
	}
	return nil
}
