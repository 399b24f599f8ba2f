package formula

import (
	"encoding/json"
	"errors"
	"math"
	"testing"

	"pgregory.net/rapid"
)

// close1 compares with a tolerance of a few roundings of double precision.
func close1(a, b float64) bool {
	if math.IsNaN(a) || math.IsNaN(b) {
		return math.IsNaN(a) && math.IsNaN(b)
	}
	return a == b || math.Abs(a-b) <= 8e-16*math.Max(math.Abs(a), math.Abs(b))
}

func TestHistories(t *testing.T) {
	arg := Arg(ArgT)
	half := Apply(OpHalfSine, arg, Const(300), Const(0.005))
	sine := Apply(OpSine, arg, Const(2), Const(50), Const(math.Pi/2))
	sweep := Apply(OpSweepSine, arg, Const(3), Const(1), Const(5), Const(2))
	step := Apply(OpStep, arg, Const(7), Const(0.25))
	ramp := Apply(OpRamp, arg, Const(8), Const(1), Const(3))
	rows := Lookup(&Table{X: []float64{0, 1, 3}, Y: []float64{2, 4, -4}}, arg)
	// The values follow from the formulas in the comment of history by hand.
	for _, c := range []struct {
		name string
		p    Program
		t    float64
		want float64
	}{
		{"half sine before", half, -1e-9, 0}, {"half sine top", half, 0.0025, 300}, {"half sine after", half, 0.005, 0},
		{"half sine third", half, 0.005 / 6, 150},
		{"sine before", sine, -0.001, 0}, {"sine at 0", sine, 0, 2}, {"sine half a period on", sine, 0.01, -2},
		// phase 2 pi (1 + 4/(2*2)) = 4 pi at t = 1; instantaneous frequency there 3 Hz.
		{"sweep at 1 s", sweep, 1.0 / 2, 3 * math.Sin(2*math.Pi*(0.5+0.25))}, {"sweep after", sweep, 2, 0},
		{"step before", step, 0.2499, 0}, {"step on", step, 0.25, 7},
		{"ramp before", ramp, 0.5, 0}, {"ramp middle", ramp, 2, 4}, {"ramp after", ramp, 9, 8},
		{"table row", rows, 1, 4}, {"table between", rows, 2, 0}, {"table outside", rows, 3.1, 0}, {"table before", rows, -0.1, 0},
	} {
		if got := c.p.At(c.t, 0); math.Abs(got-c.want) > 1e-12*math.Max(1, math.Abs(c.want)) {
			t.Errorf("%s: %g, want %g", c.name, got, c.want)
		}
	}
}

func TestTableAtNoPlace(t *testing.T) {
	rows := &Table{X: []float64{0, 1}, Y: []float64{2, 4}}
	if v := rows.At(math.NaN()); !math.IsNaN(v) {
		t.Errorf("at NaN: %g", v)
	}
	if v := (&Table{}).At(1); v != 0 {
		t.Errorf("of no rows: %g", v)
	}
}

func TestOperations(t *testing.T) {
	for _, c := range []struct {
		op   Op
		args []float64
		want float64
	}{
		{OpNeg, []float64{3}, -3}, {OpAdd, []float64{3, 4}, 7}, {OpSub, []float64{3, 4}, -1}, {OpMul, []float64{3, 4}, 12}, {OpDiv, []float64{3, 4}, 0.75},
		{OpPow, []float64{3, 2}, 9}, {OpPow, []float64{2, 0.5}, math.Sqrt2}, {OpPow, []float64{4, -1}, 0.25}, {OpPow, []float64{2, 10}, 1024},
		{OpSqrt, []float64{9}, 3}, {OpSqrt, []float64{-1}, math.NaN()}, {OpAbs, []float64{-2}, 2}, {OpMin, []float64{1, 2}, 1}, {OpMax, []float64{1, 2}, 2},
		{OpSin, []float64{math.Pi / 6}, 0.5}, {OpCos, []float64{math.Pi / 3}, 0.5}, {OpTan, []float64{math.Pi / 4}, 1},
		{OpExp, []float64{1}, math.E}, {OpLog, []float64{math.E}, 1},
		{OpLess, []float64{1, 2}, 1}, {OpLess, []float64{2, 2}, 0}, {OpLessEq, []float64{2, 2}, 1},
		{OpSelect, []float64{1, 5, 6}, 5}, {OpSelect, []float64{0, 5, 6}, 6}, {OpDiv, []float64{0, 0}, math.NaN()},
	} {
		consts := make([]Program, len(c.args))
		reads := make([]Program, len(c.args))
		for i, v := range c.args {
			consts[i], reads[i] = Const(v), Arg(i)
		}
		folded, ok := Apply(c.op, consts...).IsConst()
		run := Apply(c.op, reads...).Eval(nil, c.args)
		if !ok || !close1(folded, run) || !(close1(run, c.want) || math.Abs(run-c.want) < 4e-16) {
			t.Errorf("%s%v: folded %g, run %g, want %g", opNames[c.op], c.args, folded, run, c.want)
		}
	}
}

// anyProgram draws a program over three lets and four arguments, along with a
// tree evaluator of its own that knows nothing of the stack.
func anyProgram(t *rapid.T, levels int) (Program, func(lets, args []float64) float64) {
	kind := rapid.IntRange(0, 5).Draw(t, "kind")
	if levels == 0 && kind > 2 {
		kind = kind - 3
	}
	switch kind {
	case 0:
		v := rapid.Float64Range(-3, 3).Draw(t, "const")
		return Const(v), func(_, _ []float64) float64 { return v }
	case 1:
		i := rapid.IntRange(0, 2).Draw(t, "let")
		return Let(i), func(lets, _ []float64) float64 { return lets[i] }
	case 2:
		i := rapid.IntRange(0, 3).Draw(t, "arg")
		return Arg(i), func(_, args []float64) float64 { return args[i] }
	case 3:
		table := &Table{Name: "rows", X: []float64{-1, 0, 2}, Y: []float64{1, -1, 5}}
		a, fa := anyProgram(t, levels-1)
		return Lookup(table, a), func(l, g []float64) float64 { return table.At(fa(l, g)) }
	case 4:
		a, fa := anyProgram(t, levels-1)
		b, fb := anyProgram(t, levels-1)
		c, fc := anyProgram(t, levels-1)
		return Apply(OpSelect, Apply(OpLess, a, b), c, Neg(a)), func(l, g []float64) float64 {
			if fa(l, g) < fb(l, g) {
				return fc(l, g)
			}
			return -fa(l, g)
		}
	}
	a, fa := anyProgram(t, levels-1)
	b, fb := anyProgram(t, levels-1)
	switch rapid.IntRange(0, 3).Draw(t, "rule") {
	case 0:
		return Add(a, b), func(l, g []float64) float64 { return fa(l, g) + fb(l, g) }
	case 1:
		return Sub(a, b), func(l, g []float64) float64 { return fa(l, g) - fb(l, g) }
	case 2:
		return Mul(a, b), func(l, g []float64) float64 { return fa(l, g) * fb(l, g) }
	}
	return Div(a, b), func(l, g []float64) float64 { return fa(l, g) / fb(l, g) }
}

// Neg is -a, for the tests.
func Neg(a Program) Program { return Apply(OpNeg, a) }

func same(a, b float64) bool { return a == b || math.IsNaN(a) && math.IsNaN(b) }

func TestProgramsAgreeWithTrees(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p, tree := anyProgram(t, 5)
		lets := []float64{rapid.Float64Range(-4, 4).Draw(t, "l0"), 2.5, -0.75}
		args := []float64{0.3, -1.2, rapid.Float64Range(-4, 4).Draw(t, "a2"), 0}
		want := tree(lets, args)
		if got := p.Eval(lets, args); !same(got, want) {
			t.Fatalf("%v: %g, tree %g", p, got, want)
		}
		if got := p.Bind(lets).Eval(nil, args); !same(got, want) {
			t.Fatalf("bound %v: %g, tree %g", p.Bind(lets), got, want)
		}
		data, err := json.Marshal(p)
		if err != nil {
			t.Fatal(err)
		}
		var back Program
		if err := json.Unmarshal(data, &back); err != nil {
			t.Fatalf("%v from %s", err, data)
		}
		if back.Depth() != p.Depth() || back.String() != p.String() || !same(back.Eval(lets, args), want) {
			t.Fatalf("written and read again: %v (depth %d), was %v (depth %d)", back, back.Depth(), p, p.Depth())
		}
		raw := Program{Code: p.Code, Tables: p.Tables}
		if got := raw.Eval(lets, args); !same(got, want) {
			t.Fatalf("without its depth %v: %g, want %g", p, got, want)
		}
	})
}

func TestDeepProgram(t *testing.T) {
	// Right-leaning sum: the stack grows by one with every term.
	p := Arg(0)
	for range MaxDepth - 1 {
		p = Add(Arg(0), p)
	}
	if p.Depth() != MaxDepth {
		t.Fatalf("depth %d", p.Depth())
	}
	if got := p.Eval(nil, []float64{0.5}); got != MaxDepth/2 {
		t.Errorf("sum %g, want %d", got, MaxDepth/2)
	}
	if _, err := New(Add(Arg(0), p).Code, nil); !errors.Is(err, ErrInvalid) {
		t.Errorf("one deeper: %v", err)
	}
}

func TestNonFiniteConstants(t *testing.T) {
	for _, v := range []float64{math.Inf(1), math.Inf(-1), math.NaN(), math.Copysign(0, -1), math.MaxFloat64, 5e-324} {
		data, err := json.Marshal(Const(v))
		if err != nil {
			t.Fatal(err)
		}
		var p Program
		if err := json.Unmarshal(data, &p); err != nil {
			t.Fatal(err)
		}
		got, _ := p.IsConst()
		if math.Float64bits(got) != math.Float64bits(v) && !(math.IsNaN(v) && math.IsNaN(got)) {
			t.Errorf("%g came back as %g", v, got)
		}
	}
}

func TestNewRefuses(t *testing.T) {
	for _, text := range []string{
		`{"code":[{"op":4}]}`,
		`{"code":[{"op":0,"value":1},{"op":0,"value":2}]}`,
		`{"code":[{"op":200}]}`,
		`{"code":[{"op":1,"index":-1}]}`,
		`{"code":[{"op":0,"value":1},{"op":26}]}`,
		`{"code":[{"op":0,"value":1},{"op":26}],"tables":[{"x":[1,1],"y":[0,0]}]}`,
		`{"code":[{"op":0,"value":1},{"op":26}],"tables":[{"x":[1],"y":[]}]}`,
		`{"code":[{"op":0,"value":"many"}]}`,
	} {
		var p Program
		if err := json.Unmarshal([]byte(text), &p); !errors.Is(err, ErrInvalid) {
			t.Errorf("%s: %v", text, err)
		}
	}
	var zero Program
	if err := json.Unmarshal([]byte(`{"code":null}`), &zero); err != nil || zero.Eval(nil, nil) != 0 {
		t.Errorf("the empty program: %v", err)
	}
}

func TestEvalAllocatesNothing(t *testing.T) {
	p := Add(Apply(OpSine, Arg(0), Let(0), Const(3), Const(0)), Lookup(&Table{X: []float64{0, 1}, Y: []float64{0, 1}}, Arg(0)))
	lets, args := []float64{2}, []float64{0.1}
	if n := testing.AllocsPerRun(100, func() { p.Eval(lets, args) }); n != 0 {
		t.Errorf("%g allocations", n)
	}
}

func TestUses(t *testing.T) {
	p := Add(Mul(Let(2), Arg(ArgX)), Let(0))
	used := map[int]bool{}
	p.LetsUsed(used)
	if !used[0] || used[1] || !used[2] || !p.UsesArg(ArgX) || p.UsesArg(ArgT) {
		t.Errorf("used %v", used)
	}
	if !p.Smooth() || Apply(OpAbs, p).Smooth() {
		t.Error("smoothness")
	}
}

func FuzzUnmarshal(f *testing.F) {
	f.Add([]byte(`{"code":[{"op":0,"value":1},{"op":2,"index":1},{"op":4}]}`))
	f.Fuzz(func(t *testing.T, data []byte) {
		var p Program
		if json.Unmarshal(data, &p) != nil {
			return
		}
		for _, in := range p.Code {
			if in.Op == OpLet && in.Index > 7 || in.Op == OpArg && in.Index > 7 {
				return
			}
		}
		p.Eval(make([]float64, 8), make([]float64, 8))
	})
}

func BenchmarkEval(b *testing.B) {
	args := []float64{0.1, 0.2}
	deep := Arg(0)
	for range 40 {
		deep = Add(Arg(0), deep)
	}
	for _, c := range []struct {
		name string
		p    Program
	}{
		{"const", Const(3)},
		{"ramp", Apply(OpRamp, Arg(0), Const(1), Const(0), Const(1))},
		{"polynomial", Add(Mul(Const(2), Mul(Arg(0), Arg(0))), Arg(1))},
		{"deep", deep},
	} {
		b.Run(c.name, func(b *testing.B) {
			for b.Loop() {
				c.p.Eval(nil, args)
			}
		})
	}
}
