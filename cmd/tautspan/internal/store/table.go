package store

import (
	"bufio"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"strconv"
	"strings"

	"github.com/parquet-go/parquet-go"
)

// toFile creates a file, lets fill write it through a buffer, and reports the
// first error, closing included.
func toFile(name string, fill func(io.Writer) error) (err error) {
	file, err := os.Create(name)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, file.Close()) }()
	buf := bufio.NewWriterSize(file, 1<<20)
	if err := fill(buf); err != nil {
		return err
	}
	return buf.Flush()
}

func (t *Table) rows() int {
	if len(t.Columns) == 0 {
		return 0
	}
	return len(t.Columns[0].Values)
}

// writeCSV writes a header row and shortest decimals that read back to the same
// number; a value that does not exist is an empty field.
func (t *Table) writeCSV(w io.Writer) error {
	line := make([]byte, 0, 1024)
	for i, c := range t.Columns {
		if i > 0 {
			line = append(line, ',')
		}
		name := c.Name
		if strings.ContainsAny(name, ",\"\n") {
			name = `"` + strings.ReplaceAll(name, `"`, `""`) + `"`
		}
		line = append(line, name...)
	}
	line = append(line, '\n')
	for row := 0; row < t.rows(); row++ {
		for i := range t.Columns {
			if i > 0 {
				line = append(line, ',')
			}
			if v := t.Columns[i].Values[row]; !math.IsNaN(v) && !math.IsInf(v, 0) {
				line = strconv.AppendFloat(line, v, 'g', -1, 64)
			}
		}
		line = append(line, '\n')
		if len(line) > 1<<16 {
			if _, err := w.Write(line); err != nil {
				return err
			}
			line = line[:0]
		}
	}
	_, err := w.Write(line)
	return err
}

// ordered is a parquet group that keeps its columns in the order given; the
// library's own group sorts them by name.
type ordered struct {
	parquet.Group
	names []string
}

// Fields lists the columns in order.
func (o ordered) Fields() []parquet.Field {
	byName := map[string]parquet.Field{}
	for _, f := range o.Group.Fields() {
		byName[f.Name()] = f
	}
	fields := make([]parquet.Field, len(o.names))
	for i, n := range o.names {
		fields[i] = byName[n]
	}
	return fields
}

func number() parquet.Node {
	return parquet.Compressed(parquet.Encoded(parquet.Leaf(parquet.DoubleType), &parquet.ByteStreamSplit), &parquet.Zstd)
}

// createdBy keeps the library's build information out of the file, so that the
// same result gives the same bytes.
var createdBy = parquet.CreatedBy("tautspan", "1", "")

// rowsAtOnce is how many rows are handed to the writer together.
const rowsAtOnce = 1024

func (t *Table) writeParquet(w io.Writer) error {
	group := ordered{Group: parquet.Group{}}
	for _, c := range t.Columns {
		if _, twice := group.Group[c.Name]; twice {
			return fmt.Errorf("two columns are called %q", c.Name)
		}
		group.Group[c.Name] = parquet.Optional(number())
		group.names = append(group.names, c.Name)
	}
	pw := parquet.NewWriter(w, parquet.NewSchema("series", group), createdBy)
	batch := make([]parquet.Row, 0, rowsAtOnce)
	for row := 0; row < t.rows(); row++ {
		r := make(parquet.Row, len(t.Columns))
		for i := range t.Columns {
			if v := t.Columns[i].Values[row]; math.IsNaN(v) || math.IsInf(v, 0) {
				r[i] = parquet.NullValue().Level(0, 0, i)
			} else {
				r[i] = parquet.DoubleValue(v).Level(0, 1, i)
			}
		}
		batch = append(batch, r)
		if len(batch) == rowsAtOnce || row == t.rows()-1 {
			if _, err := pw.WriteRows(batch); err != nil {
				return err
			}
			batch = batch[:0]
		}
	}
	return pw.Close()
}

// writeParquet writes one row a time with a list over x; the places stand in
// the file's metadata under "x [m]" as a JSON list.
func (p *Picture) writeParquet(w io.Writer) error {
	grid, err := json.Marshal(p.X)
	if err != nil {
		return err
	}
	group := ordered{Group: parquet.Group{"time [s]": number(), p.Name: parquet.Repeated(number())}, names: []string{"time [s]", p.Name}}
	pw := parquet.NewWriter(w, parquet.NewSchema("field", group), createdBy, parquet.KeyValueMetadata("x [m]", string(grid)))
	for i, t := range p.Time {
		row := make(parquet.Row, 0, 1+len(p.X))
		row = append(row, parquet.DoubleValue(t).Level(0, 0, 0))
		for k, v := range p.Values[i] {
			repeat := 1
			if k == 0 {
				repeat = 0
			}
			row = append(row, parquet.DoubleValue(v).Level(repeat, 1, 1))
		}
		if _, err := pw.WriteRows([]parquet.Row{row}); err != nil {
			return err
		}
	}
	return pw.Close()
}
