package formula

import (
	"fmt"
	"math"
	"strings"
)

// Op is one operation of a program.
type Op uint8

// The operations. Operands are taken from the stack in the order in which they
// were pushed; each operation leaves one value.
const (
	OpConst     Op = iota // push Value
	OpLet                 // push let number Index
	OpArg                 // push argument number Index
	OpNeg                 // -a
	OpAdd                 // a + b
	OpSub                 // a - b
	OpMul                 // a * b
	OpDiv                 // a / b
	OpPow                 // a ^ b
	OpSqrt                // square root
	OpAbs                 // magnitude
	OpMin                 // smaller of a, b
	OpMax                 // larger of a, b
	OpSin                 // sine, a in rad
	OpCos                 // cosine, a in rad
	OpTan                 // tangent, a in rad
	OpExp                 // natural exponential
	OpLog                 // natural logarithm
	OpLess                // 1 if a < b, else 0
	OpLessEq              // 1 if a <= b, else 0
	OpSelect              // a, b, c: b if a is not 0, else c
	OpHalfSine            // t, peak, duration
	OpSine                // t, amplitude, frequency, phase (rad); 0 before t = 0
	OpSweepSine           // t, amplitude, f1, f2, duration
	OpStep                // t, value, time
	OpRamp                // t, value, from, to
	OpTable               // t; table number Index, linear between rows, 0 outside
	opCount
)

// Arguments of the programs that a scenario holds. A program says which it
// reads through UsesArg.
const (
	ArgT = 0 // time, s
	ArgX = 1 // place along the named segment or line, m
	ArgU = 2 // displacement, m (laws)
	ArgV = 3 // velocity, m/s (laws)
)

var opNames = [opCount]string{
	"const", "let", "arg", "neg", "add", "sub", "mul", "div", "pow", "sqrt", "abs", "min", "max",
	"sin", "cos", "tan", "exp", "log", "less", "lesseq", "select", "half_sine", "sine", "sweep_sine", "step", "ramp", "table",
}

var opArity = [opCount]int8{
	OpNeg: 1, OpAdd: 2, OpSub: 2, OpMul: 2, OpDiv: 2, OpPow: 2, OpSqrt: 1, OpAbs: 1, OpMin: 2, OpMax: 2,
	OpSin: 1, OpCos: 1, OpTan: 1, OpExp: 1, OpLog: 1, OpLess: 2, OpLessEq: 2, OpSelect: 3,
	OpHalfSine: 3, OpSine: 4, OpSweepSine: 5, OpStep: 3, OpRamp: 4, OpTable: 1,
}

// Instr is one step of a program.
type Instr struct {
	Op    Op      `json:"op"`
	Index int     `json:"index,omitempty"` // let, argument or table number
	Value float64 `json:"value,omitempty"` // of OpConst
}

// Program is an expression in postfix form. The zero Program is the number 0.
type Program struct {
	Code   []Instr  `json:"code"`
	Tables []*Table `json:"tables,omitempty"`
	depth  int
}

// maxStack is the deepest stack that a program may need; deeper expressions are
// refused when they are built. The language caps brackets at 200.
const maxStack = 256

// Const is the program that is always v.
func Const(v float64) Program { return Program{Code: []Instr{{Op: OpConst, Value: v}}, depth: 1} }

// Let is the program that reads let number i.
func Let(i int) Program { return Program{Code: []Instr{{Op: OpLet, Index: i}}, depth: 1} }

// Arg is the program that reads argument number i.
func Arg(i int) Program { return Program{Code: []Instr{{Op: OpArg, Index: i}}, depth: 1} }

// Apply joins operands by an operation. It folds constants, so that a bound
// program carries no work that can be done once. Apply panics if the number of
// operands is not the operation's.
func Apply(op Op, operands ...Program) Program {
	if op <= OpArg || op >= opCount || op == OpTable || int(opArity[op]) != len(operands) {
		panic(fmt.Sprintf("formula: %d operands for operation %d", len(operands), op))
	}
	return join(Instr{Op: op}, nil, operands)
}

// Lookup is the value of a table at the program's value.
func Lookup(table *Table, at Program) Program {
	return join(Instr{Op: OpTable}, table, []Program{at})
}

func join(last Instr, table *Table, operands []Program) Program {
	var out Program
	constant := true
	for i, p := range operands {
		if len(p.Code) == 0 {
			p = Const(0)
		}
		if p.depth+i > out.depth {
			out.depth = p.depth + i
		}
		constant = constant && len(p.Code) == 1 && p.Code[0].Op == OpConst
		base := len(out.Tables)
		for _, in := range p.Code {
			if in.Op == OpTable {
				in.Index += base
			}
			out.Code = append(out.Code, in)
		}
		out.Tables = append(out.Tables, p.Tables...)
	}
	if table != nil {
		last.Index = len(out.Tables)
		out.Tables = append(out.Tables, table)
	}
	out.Code = append(out.Code, last)
	if constant {
		return Const(out.Eval(nil, nil))
	}
	return out
}

// Shorthands for the four rules of arithmetic.

// Add is a + b.
func Add(a, b Program) Program { return Apply(OpAdd, a, b) }

// Sub is a - b.
func Sub(a, b Program) Program { return Apply(OpSub, a, b) }

// Mul is a * b.
func Mul(a, b Program) Program { return Apply(OpMul, a, b) }

// Div is a / b.
func Div(a, b Program) Program { return Apply(OpDiv, a, b) }

// Depth is the stack that an evaluation needs; programs deeper than MaxDepth
// cannot be evaluated and are to be refused by whoever builds them.
func (p Program) Depth() int { return p.depth }

// MaxDepth is the deepest program that Eval takes.
const MaxDepth = maxStack

// IsConst tells whether the program is one number, and which.
func (p Program) IsConst() (float64, bool) {
	switch {
	case len(p.Code) == 0:
		return 0, true
	case len(p.Code) == 1 && p.Code[0].Op == OpConst:
		return p.Code[0].Value, true
	}
	return 0, false
}

// UsesArg tells whether the program reads argument i.
func (p Program) UsesArg(i int) bool {
	for _, in := range p.Code {
		if in.Op == OpArg && in.Index == i {
			return true
		}
	}
	return false
}

// LetsUsed marks in used every let that the program reads.
func (p Program) LetsUsed(used map[int]bool) {
	for _, in := range p.Code {
		if in.Op == OpLet {
			used[in.Index] = true
		}
	}
}

// Smooth tells whether the program is a smooth function of its arguments as far
// as its operations show: no magnitude, smaller, larger, comparison or table.
// Histories with breaks of their own (half_sine, step, ...) count as not smooth.
func (p Program) Smooth() bool {
	for _, in := range p.Code {
		switch in.Op {
		case OpAbs, OpMin, OpMax, OpLess, OpLessEq, OpSelect, OpHalfSine, OpSine, OpSweepSine, OpStep, OpRamp, OpTable:
			return false
		}
	}
	return true
}

// Bind replaces every let by its value and folds what has become constant.
func (p Program) Bind(lets []float64) Program {
	var stack []Program
	for _, in := range p.Code {
		switch in.Op {
		case OpConst, OpArg:
			stack = append(stack, Program{Code: []Instr{in}, depth: 1})
		case OpLet:
			stack = append(stack, Const(lets[in.Index]))
		default:
			n := int(opArity[in.Op])
			var table *Table
			if in.Op == OpTable {
				table = p.Tables[in.Index]
			}
			at := len(stack) - n
			stack[at] = join(Instr{Op: in.Op}, table, stack[at:])
			stack = stack[:at+1]
		}
	}
	if len(stack) == 0 {
		return Const(0)
	}
	return stack[0]
}

// shallow is the stack that most programs fit in. A deep stack is 2 kB to clear
// at every call, which would cost more than the arithmetic of a usual history.
const shallow = 12

// Eval is the program's value. Lets and args may be nil when the program reads
// none; an index outside them is a caller's mistake and panics. A value that
// does not exist (0/0, the root of a negative number) is NaN.
func (p Program) Eval(lets, args []float64) float64 {
	if len(p.Code) == 1 {
		switch in := &p.Code[0]; in.Op {
		case OpConst:
			return in.Value
		case OpLet:
			return lets[in.Index]
		case OpArg:
			return args[in.Index]
		}
	}
	depth := p.depth
	if depth == 0 {
		depth = stackOf(p.Code)
	}
	if depth <= shallow {
		var stack [shallow]float64
		return p.run(stack[:], lets, args)
	}
	return p.evalDeep(lets, args)
}

// evalDeep stands apart so that only deep programs pay for the deep stack.
//
//go:noinline
func (p Program) evalDeep(lets, args []float64) float64 {
	var stack [maxStack]float64
	return p.run(stack[:], lets, args)
}

func (p Program) run(stack, lets, args []float64) float64 {
	n := 0
	for i := range p.Code {
		in := &p.Code[i]
		switch in.Op {
		case OpConst:
			stack[n] = in.Value
			n++
			continue
		case OpLet:
			stack[n] = lets[in.Index]
			n++
			continue
		case OpArg:
			stack[n] = args[in.Index]
			n++
			continue
		case OpAdd:
			n--
			stack[n-1] += stack[n]
			continue
		case OpSub:
			n--
			stack[n-1] -= stack[n]
			continue
		case OpMul:
			n--
			stack[n-1] *= stack[n]
			continue
		}
		n -= int(opArity[in.Op])
		stack[n] = apply(in, p.Tables, stack[n:])
		n++
	}
	if n == 0 {
		return 0
	}
	return stack[0]
}

// stackOf is the stack that code needs, -1 where it is not a program: an
// operation without operands, or more or less than one value left.
func stackOf(code []Instr) int {
	n, deepest := 0, 0
	for i := range code {
		if code[i].Op >= opCount {
			return -1
		}
		n -= int(opArity[code[i].Op])
		if n < 0 {
			return -1
		}
		n++
		deepest = max(deepest, n)
	}
	if n != 1 && len(code) > 0 {
		return -1
	}
	return deepest
}

// At is the value of a bound program at time t and place x.
func (p Program) At(t, x float64) float64 {
	args := [2]float64{t, x}
	return p.Eval(nil, args[:])
}

// apply is one operation on its operands s, apart from those that run does
// itself.
func apply(in *Instr, tables []*Table, s []float64) float64 {
	switch in.Op {
	case OpNeg:
		return -s[0]
	case OpDiv:
		return s[0] / s[1]
	case OpPow:
		return power(s[0], s[1])
	case OpSqrt:
		return math.Sqrt(s[0])
	case OpAbs:
		return math.Abs(s[0])
	case OpMin:
		return math.Min(s[0], s[1])
	case OpMax:
		return math.Max(s[0], s[1])
	case OpSin:
		return math.Sin(s[0])
	case OpCos:
		return math.Cos(s[0])
	case OpTan:
		return math.Tan(s[0])
	case OpExp:
		return math.Exp(s[0])
	case OpLog:
		return math.Log(s[0])
	case OpLess:
		return truth(s[0] < s[1])
	case OpLessEq:
		return truth(s[0] <= s[1])
	case OpSelect:
		if s[0] != 0 {
			return s[1]
		}
		return s[2]
	case OpTable:
		return tables[in.Index].At(s[0])
	}
	return history(in.Op, s)
}

func power(a, b float64) float64 {
	switch b {
	case 1:
		return a
	case 2:
		return a * a
	case 3:
		return a * a * a
	case -1:
		return 1 / a
	}
	return math.Pow(a, b)
}

func truth(b bool) float64 {
	if b {
		return 1
	}
	return 0
}

// String writes the program as text for logs and tests.
func (p Program) String() string {
	words := make([]string, 0, len(p.Code))
	for _, in := range p.Code {
		switch in.Op {
		case OpConst:
			words = append(words, fmt.Sprint(in.Value))
		case OpLet, OpArg, OpTable:
			words = append(words, fmt.Sprintf("%s%d", opNames[in.Op], in.Index))
		default:
			words = append(words, opNames[in.Op])
		}
	}
	return strings.Join(words, " ")
}
