package record

import (
	"bufio"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"time"
)

// headMost is how many rows may stand before the data.
const headMost = 60

// table is a CSV file as it is read, row by row.
type table struct {
	reader  *csv.Reader
	decimal bool // commas are decimal points
	rows    int  // read so far
}

// dialect tells delimiter and decimal sign from the first lines.
func dialect(head string) (comma rune, decimal bool) {
	best, comma := 0, ','
	for _, d := range []rune{'\t', ';', ','} {
		// The least count over lines that have any: the data's, not a comment's.
		least := 0
		for _, line := range strings.Split(head, "\n") {
			if n := strings.Count(line, string(d)); n > 0 && !strings.HasPrefix(strings.TrimSpace(line), "#") && (least == 0 || n < least) {
				least = n
			}
		}
		if d == ',' && comma != ',' {
			break // commas beside tabs or semicolons are decimal points
		}
		if least > best {
			best, comma = least, d
		}
	}
	if comma != ',' {
		for _, line := range strings.Split(head, "\n") {
			for _, f := range strings.Split(line, string(comma)) {
				if a, b, ok := strings.Cut(strings.TrimSpace(f), ","); ok && digits(a) && digits(b) {
					return comma, true
				}
			}
		}
	}
	return comma, false
}

func digits(s string) bool {
	s = strings.TrimLeft(s, "+-")
	for _, c := range s {
		if c < '0' || c > '9' {
			if c == 'e' || c == 'E' {
				return true
			}
			return false
		}
	}
	return true
}

func open(r io.Reader) (*table, error) {
	b := bufio.NewReaderSize(r, 1<<16)
	if bom, _ := b.Peek(3); string(bom) == "\xef\xbb\xbf" {
		if _, err := b.Discard(3); err != nil {
			return nil, err
		}
	}
	head, err := b.Peek(1 << 13)
	if err != nil && !errors.Is(err, io.EOF) && !errors.Is(err, bufio.ErrBufferFull) {
		return nil, err
	}
	if i := strings.IndexByte(string(head), 0); i >= 0 {
		return nil, &Error{Code: "not-a-table", What: "this is no table of text", Hint: "a WAV file has the ending .wav"}
	}
	t := &table{reader: csv.NewReader(b)}
	t.reader.Comma, t.decimal = dialect(string(head))
	t.reader.Comment, t.reader.FieldsPerRecord, t.reader.LazyQuotes, t.reader.TrimLeadingSpace = '#', -1, true, t.reader.Comma != '\t'
	t.reader.ReuseRecord = true
	return t, nil
}

// next is the next row; its fields are valid until the one after it.
func (t *table) next() ([]string, error) {
	row, err := t.reader.Read()
	var parse *csv.ParseError
	if errors.As(err, &parse) {
		return nil, &Error{Code: "broken-row", Line: parse.Line, Column: parse.Column, What: parse.Err.Error()}
	}
	t.rows++
	return row, err
}

func (t *table) place(field int) (line, column int) { return t.reader.FieldPos(field) }

// number reads a field: a number, or NaN where it is empty or says so.
func (t *table) number(field string) (float64, bool) {
	field = strings.TrimSpace(field)
	switch strings.ToLower(field) {
	case "", "nan", "na", "n/a", "-", "null":
		return math.NaN(), true
	}
	if t.decimal {
		field = strings.Replace(field, ",", ".", 1)
	}
	v, err := strconv.ParseFloat(field, 64)
	return v, err == nil && !math.IsInf(v, 0)
}

// stampForms are the forms of a time of day that loggers write.
var stampForms = []string{
	"2006-01-02T15:04:05.999999999Z07:00", "2006-01-02T15:04:05.999999999", "2006-01-02 15:04:05.999999999",
	"02.01.2006 15:04:05.999999999", "2006/01/02 15:04:05.999999999", "15:04:05.999999999",
}

// stamp reads a time of day in seconds.
func (t *table) stamp(field string) (float64, bool) {
	field = strings.TrimSpace(field)
	if strings.Count(field, ":") < 1 {
		return 0, false
	}
	if t.decimal {
		field = strings.Replace(field, ",", ".", 1)
	}
	for _, form := range stampForms {
		if at, err := time.Parse(form, field); err == nil {
			return float64(at.Unix()%(400*86400)) + float64(at.Nanosecond())/1e9, true
		}
	}
	return 0, false
}

// heading is what stands above the data.
type heading struct {
	names, units []string
	columns      int
	first        []string // first row of data
	line         int
}

// head reads to the first row of data: the first in which every field is a
// number or a time, with another like it before anything else is assumed.
func (t *table) head() (*heading, error) {
	var before [][]string
	for range headMost {
		row, err := t.next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return nil, err
		}
		kept := append([]string(nil), row...)
		if !t.isData(kept) {
			before = append(before, kept)
			continue
		}
		line, _ := t.place(0)
		h := &heading{columns: len(kept), first: kept, line: line}
		h.name(before)
		return h, nil
	}
	line, _ := 1, 0
	if len(before) > 0 {
		line = len(before)
	}
	return nil, &Error{Code: "no-data", Line: line, Column: 1, What: "no row of numbers is found", Hint: "rows of numbers, separated by commas, semicolons or tabs, with a heading above them"}
}

func (t *table) isData(row []string) bool {
	some := false
	for _, f := range row {
		if strings.TrimSpace(f) == "" {
			continue
		}
		_, num := t.number(f)
		_, stamp := t.stamp(f)
		if !num && !stamp {
			return false
		}
		some = true
	}
	return some
}

// name takes the rows above the data: names, perhaps units under them.
func (h *heading) name(before [][]string) {
	var like [][]string
	for _, row := range before {
		if len(row) == h.columns || h.columns == 1 && len(row) == 1 {
			like = append(like, row)
		}
	}
	h.names, h.units = make([]string, h.columns), make([]string, h.columns)
	if n := len(like); n > 1 {
		h.names, h.units = like[n-2], like[n-1]
	} else if n == 1 {
		h.names = like[0]
	}
	for i := range h.names {
		h.names[i] = strings.TrimSpace(h.names[i])
		h.units[i] = strings.Trim(strings.TrimSpace(h.units[i]), "[]()")
		for _, pair := range []string{"[]", "()"} {
			open := strings.LastIndexByte(h.names[i], pair[0])
			if open > 0 && strings.HasSuffix(h.names[i], pair[1:]) {
				h.units[i] = strings.TrimSpace(h.names[i][open+1 : len(h.names[i])-1])
				h.names[i] = strings.TrimSpace(h.names[i][:open])
			}
		}
		if h.names[i] == "" {
			h.names[i] = strconv.Itoa(i + 1)
		}
	}
}

// ReadCSV reads a logger's table. Delimiters are commas, semicolons or tabs;
// with the latter two commas may be decimal points. Rows above the first row of
// numbers are headings, the last of them units where there are two.
func ReadCSV(r io.ReadSeeker, opt Options) (*Record, error) {
	size, err := r.Seek(0, io.SeekEnd)
	if err != nil {
		return nil, err
	}
	if _, err = r.Seek(0, io.SeekStart); err != nil {
		return nil, err
	}
	t, err := open(r)
	if err != nil {
		return nil, err
	}
	h, err := t.head()
	if err != nil {
		return nil, err
	}
	c := &columns{table: t, head: h, opt: opt, rows: rowsIn(size, h)}
	if err := c.choose(); err != nil {
		return nil, err
	}
	if err := c.read(); err != nil {
		return nil, err
	}
	return c.record()
}

// rowsIn is how many rows a file of so many bytes can hold at most: its rows
// vary in length, and one that is shorter by more than a third is not planned for.
func rowsIn(size int64, h *heading) int {
	long := 0
	for _, f := range h.first {
		long += len(f) + 1
	}
	return int(size/int64(max(1, 2*long/3))) + 1
}

func fieldError(code string, line, column int, what, hint string, args ...any) error {
	return &Error{Code: code, Line: line, Column: column, What: fmt.Sprintf(what, args...), Hint: hint}
}
