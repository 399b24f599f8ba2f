package formula

import (
	"slices"
	"testing"
)

func TestSines(t *testing.T) {
	sine := func(f Program) Program { return Apply(OpSine, Arg(ArgT), Const(3), f, Const(0)) }
	p := Add(Mul(Let(0), sine(Const(2.5))), Add(sine(Let(0)), sine(Arg(ArgT))))
	if got := p.Bind([]float64{7}).Sines(); !slices.Equal(got, []float64{2.5, 7}) {
		t.Errorf("got %v, want 2.5 and 7 and not what changes", got)
	}
	if got := Const(3).Sines(); len(got) != 0 {
		t.Errorf("got %v of a constant", got)
	}
}
