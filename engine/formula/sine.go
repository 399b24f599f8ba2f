package formula

// Sines are the frequencies, Hz, of the sine histories in a bound program whose
// frequency does not change.
func (p Program) Sines() []float64 {
	var out []float64
	type operand struct {
		value    float64
		constant bool
	}
	var stack []operand
	for i := range p.Code {
		in := &p.Code[i]
		n := int(opArity[in.Op])
		if n > len(stack) {
			return out
		}
		if in.Op == OpSine && stack[len(stack)-2].constant {
			out = append(out, stack[len(stack)-2].value)
		}
		stack = append(stack[:len(stack)-n], operand{in.Value, in.Op == OpConst})
	}
	return out
}
