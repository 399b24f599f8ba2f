package store

import (
	"bytes"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/parquet-go/parquet-go"
)

func sample(file string) *Folder {
	return &Folder{
		Result: []byte(`{"format":1,"scenario":{"file":"` + file + `"}}`), Timing: []byte("{}"), Scenario: []byte("tautspan 1\n"), Log: []byte("{}\n"),
		Series: Table{Columns: []Column{
			{"time [s]", []float64{0, 0.1, 0.2}},
			{"mid.displacement.spectral [m]", []float64{1, math.NaN(), 1.0 / 3}},
			{"a.force.band [N]", []float64{0, 1e-300, 5}},
		}},
		Pictures: []Picture{{Watch: "whole", Name: "displacement [m]", X: []float64{0, 1, 2}, Time: []float64{0, 1}, Values: [][]float64{{1, 2, 3}, {4, 5, 6}}}},
	}
}

func TestFolderIsReplacedOnlyByItsOwn(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "S7.taut.result")
	if err := Write(dir, "x/S7.taut", sample("S7.taut"), false); err != nil {
		t.Fatal(err)
	}
	if err := Write(dir, "S7.taut", sample("S7.taut"), false); err != nil {
		t.Fatalf("edit and run again: %v", err)
	}
	if _, err := os.Stat(filepath.Join(dir+".before", "series.csv")); err != nil {
		t.Errorf("the former result is not kept: %v", err)
	}
	if err := Write(dir, "other.taut", sample("other.taut"), false); !errors.Is(err, ErrForeign) {
		t.Errorf("another file's result was replaced: %v", err)
	}
	if err := Write(dir, "other.taut", sample("other.taut"), true); err != nil {
		t.Errorf("--force: %v", err)
	}
	left, _ := filepath.Glob(filepath.Join(filepath.Dir(dir), ".*part*"))
	if len(left) != 0 {
		t.Errorf("left behind: %v", left)
	}
}

func TestForeignFolderStays(t *testing.T) {
	dir := t.TempDir()
	mine := filepath.Join(dir, "notes.txt")
	if err := os.WriteFile(mine, []byte("keep"), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := Write(dir, "a.taut", sample("a.taut"), false); !errors.Is(err, ErrForeign) {
		t.Fatalf("got %v", err)
	}
	if data, err := os.ReadFile(mine); err != nil || string(data) != "keep" {
		t.Error("a foreign folder was touched")
	}
}

func TestTablesReadBack(t *testing.T) {
	f := sample("a.taut")
	var csv, pq bytes.Buffer
	if err := f.Series.writeCSV(&csv); err != nil {
		t.Fatal(err)
	}
	want := "time [s],mid.displacement.spectral [m],a.force.band [N]\n0,1,0\n0.1,,1e-300\n0.2,0.3333333333333333,5\n"
	if csv.String() != want {
		t.Errorf("CSV is\n%s\nwant\n%s", csv.String(), want)
	}
	if err := f.Series.writeParquet(&pq); err != nil {
		t.Fatal(err)
	}
	file, err := parquet.OpenFile(bytes.NewReader(pq.Bytes()), int64(pq.Len()))
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, field := range file.Schema().Fields() {
		names = append(names, field.Name())
	}
	if got := strings.Join(names, ","); got != strings.SplitN(want, "\n", 2)[0] {
		t.Errorf("columns %s", got)
	}
	rows := file.RowGroups()[0].Rows()
	defer rows.Close()
	buf := make([]parquet.Row, 3)
	n, _ := rows.ReadRows(buf)
	if n != 3 || buf[2][1].Double() != 1.0/3 || !buf[1][1].IsNull() || buf[1][2].Double() != 1e-300 {
		t.Errorf("%d rows: %v", n, buf)
	}
}

func TestPictureReadsBack(t *testing.T) {
	p := sample("a").Pictures[0]
	var b bytes.Buffer
	if err := p.writeParquet(&b); err != nil {
		t.Fatal(err)
	}
	file, err := parquet.OpenFile(bytes.NewReader(b.Bytes()), int64(b.Len()))
	if err != nil {
		t.Fatal(err)
	}
	if grid, ok := file.Lookup("x [m]"); !ok || grid != "[0,1,2]" {
		t.Errorf("grid %q", grid)
	}
	rows := file.RowGroups()[0].Rows()
	defer rows.Close()
	buf := make([]parquet.Row, 2)
	if n, _ := rows.ReadRows(buf); n != 2 || len(buf[1]) != 4 || buf[1][3].Double() != 6 {
		t.Errorf("rows %v", buf)
	}
}

func TestSameContentSameBytes(t *testing.T) {
	var a, b bytes.Buffer
	s := sample("a").Series
	if err := errors.Join(s.writeParquet(&a), s.writeParquet(&b)); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(a.Bytes(), b.Bytes()) {
		t.Error("two writes of one table differ")
	}
}
