package formula

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"strconv"
)

// ErrInvalid is wrapped by errors of New and UnmarshalJSON about code that is
// not a program.
var ErrInvalid = errors.New("formula: not a program")

// New is the program of the given code, checked: every operation is known and
// finds its operands, exactly one value is left, the stack stays within
// MaxDepth, tables exist and are in order, no index is negative. It is for
// programs that come from outside; the slices are kept.
func New(code []Instr, tables []*Table) (Program, error) {
	depth := stackOf(code)
	switch {
	case depth < 0:
		return Program{}, fmt.Errorf("%w: operands and operations do not match", ErrInvalid)
	case depth > MaxDepth:
		return Program{}, fmt.Errorf("%w: needs a stack of %d, at most %d", ErrInvalid, depth, MaxDepth)
	}
	for i := range code {
		in := &code[i]
		if in.Index < 0 || in.Op == OpTable && in.Index >= len(tables) {
			return Program{}, fmt.Errorf("%w: index %d of step %d", ErrInvalid, in.Index, i)
		}
	}
	for _, t := range tables {
		if err := t.check(); err != nil {
			return Program{}, err
		}
	}
	return Program{Code: code, Tables: tables, depth: depth}, nil
}

func (t *Table) check() error {
	if t == nil || len(t.X) != len(t.Y) {
		return fmt.Errorf("%w: a table without rows of two", ErrInvalid)
	}
	for i := 1; i < len(t.X); i++ {
		if !(t.X[i] > t.X[i-1]) {
			return fmt.Errorf("%w: table %q is not in increasing order at row %d", ErrInvalid, t.Name, i)
		}
	}
	return nil
}

// UnmarshalJSON reads a program and checks it as New does.
func (p *Program) UnmarshalJSON(data []byte) error {
	var raw struct {
		Code   []Instr  `json:"code"`
		Tables []*Table `json:"tables"`
	}
	if err := json.Unmarshal(data, &raw); err != nil {
		return err
	}
	made, err := New(raw.Code, raw.Tables)
	if err != nil {
		return err
	}
	*p = made
	return nil
}

// MarshalJSON writes one step. A constant that is not finite, which JSON has no
// number for, is written as text.
func (in Instr) MarshalJSON() ([]byte, error) {
	out := []byte(`{"op":`)
	out = strconv.AppendUint(out, uint64(in.Op), 10)
	if in.Index != 0 {
		out = append(out, `,"index":`...)
		out = strconv.AppendInt(out, int64(in.Index), 10)
	}
	if in.Op == OpConst {
		out = append(out, `,"value":`...)
		if math.IsNaN(in.Value) || math.IsInf(in.Value, 0) {
			out = strconv.AppendQuote(out, strconv.FormatFloat(in.Value, 'g', -1, 64))
		} else {
			out = strconv.AppendFloat(out, in.Value, 'g', -1, 64)
		}
	}
	return append(out, '}'), nil
}

// UnmarshalJSON reads one step.
func (in *Instr) UnmarshalJSON(data []byte) error {
	var raw struct {
		Op    Op              `json:"op"`
		Index int             `json:"index"`
		Value json.RawMessage `json:"value"`
	}
	if err := json.Unmarshal(data, &raw); err != nil {
		return err
	}
	*in = Instr{Op: raw.Op, Index: raw.Index}
	if len(raw.Value) == 0 {
		return nil
	}
	text := string(raw.Value)
	if unquoted, err := strconv.Unquote(text); err == nil {
		text = unquoted
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return fmt.Errorf("%w: constant %s", ErrInvalid, raw.Value)
	}
	in.Value = v
	return nil
}
