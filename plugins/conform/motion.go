package conform

import (
	"math"

	"github.com/tautspan/tautspan/engine/formula"
)

// jet is a function of one argument with its first four derivatives.
type jet [5]formula.Program

// cosine is a cos(k z + phase) of argument arg.
func cosine(arg int, a, k, phase float64) jet {
	c := formula.Const
	angle := func(shift float64) formula.Program {
		z := formula.Add(formula.Mul(c(k), formula.Arg(arg)), c(phase+shift))
		return formula.Apply(formula.OpCos, z)
	}
	// Each derivative turns the phase by a quarter and multiplies by k.
	return jet{
		formula.Mul(c(a), angle(0)),
		formula.Mul(c(a*k), angle(math.Pi/2)),
		formula.Mul(c(a*k*k), angle(math.Pi)),
		formula.Mul(c(a*k*k*k), angle(3*math.Pi/2)),
		formula.Mul(c(a*k*k*k*k), angle(0)),
	}
}

func constant(v float64) jet { return jet{formula.Const(v)} }

func (j jet) plus(o jet) jet {
	for i := range j {
		j[i] = formula.Add(j[i], o[i])
	}
	return j
}

// waves are the cosines that make up (1 - cos w t)^3: amplitude by multiple of w.
// A course that starts so has no displacement, velocity, ... up to its fifth
// derivative at t = 0, so that no load starts with a jump.
var waves = [4]float64{2.5, -3.75, 1.5, -0.25}

// rise is (1 - cos w t)^3.
func rise(w float64) jet {
	j := constant(waves[0])
	for n := 1; n < len(waves); n++ {
		j = j.plus(cosine(formula.ArgT, waves[n], float64(n)*w, 0))
	}
	return j
}

// motion is u(x, t) = sum of Shape_k(x) Course_k(t) along one line.
type motion []struct{ shape, course jet }

// at is the derivative of order dx in x and dt in t as a program.
func (m motion) at(dx, dt int) formula.Program {
	sum := formula.Const(0)
	for _, term := range m {
		sum = formula.Add(sum, formula.Mul(term.shape[dx], term.course[dt]))
	}
	return sum
}

// substitute replaces argument arg of a program by another program.
func substitute(p formula.Program, arg int, by formula.Program) formula.Program {
	var stack []formula.Program
	for _, in := range p.Code {
		switch in.Op {
		case formula.OpConst:
			stack = append(stack, formula.Const(in.Value))
		case formula.OpArg:
			if in.Index == arg {
				stack = append(stack, by)
			} else {
				stack = append(stack, formula.Arg(in.Index))
			}
		case formula.OpTable:
			stack[len(stack)-1] = formula.Lookup(p.Tables[in.Index], stack[len(stack)-1])
		default:
			n := operands(in.Op)
			at := len(stack) - n
			stack[at] = formula.Apply(in.Op, stack[at:]...)
			stack = stack[:at+1]
		}
	}
	if len(stack) == 0 {
		return formula.Const(0)
	}
	return stack[0]
}

// operands is the number of operands of an operation that joins programs.
func operands(op formula.Op) int {
	switch op {
	case formula.OpNeg, formula.OpSqrt, formula.OpAbs, formula.OpSin, formula.OpCos, formula.OpTan, formula.OpExp, formula.OpLog:
		return 1
	case formula.OpSelect, formula.OpHalfSine, formula.OpStep:
		return 3
	case formula.OpSine, formula.OpRamp:
		return 4
	case formula.OpSweepSine:
		return 5
	}
	return 2
}
