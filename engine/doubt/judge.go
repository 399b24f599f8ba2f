package doubt

import (
	"fmt"
	"math"
)

// Verdict is the outcome of a requirement.
type Verdict string

// The verdicts.
const (
	Met       Verdict = "met"
	NotMet    Verdict = "not met"
	Undecided Verdict = "undecided"
)

// Judgement is a requirement's verdict with what it rests on.
type Judgement struct {
	Verdict Verdict
	Margin  float64 // distance of the value from the nearest limit, positive to the good; NaN where there is none
	Leading string  // doubtful input that counts most; ""
	Settles string  // what would settle it, one sentence; "" where it is settled
}

// JudgeAbove judges one limit. The margin is the distance of the value from the
// limit, positive to the good: value - limit where the value must be above,
// limit - value where below; with the doubt of both, so that a let in both
// counts once. strict says that the limit itself is not allowed.
//
//	met       margin - numerical - 1.645 u on the good side
//	not met   margin + numerical + 1.645 u on the bad side
func JudgeAbove(margin Number, strict bool) Judgement {
	j := Judgement{Verdict: Undecided, Margin: margin.Value, Leading: margin.LeadingInput}
	good, bad := sides(margin.LowEnd, margin.HighEnd, strict)
	switch {
	case good:
		j.Verdict = Met
	case bad:
		j.Verdict = NotMet
	default:
		j.Settles = settles(margin, OneSided)
	}
	return j
}

// sides tells whether an interval of a margin lies wholly to the good, or
// wholly to the bad.
func sides(low, high float64, strict bool) (good, bad bool) {
	if strict {
		return low > 0, high <= 0
	}
	return low >= 0, high < 0
}

// JudgeWithin judges a value that must lie between two limits, both allowed:
// low is value - lower limit, high is upper limit - value. Doubt counts with
// 1.960 on both sides.
func JudgeWithin(low, high Number) Judgement {
	goodLow, badLow := sides(low.Low95, low.High95, false)
	goodHigh, badHigh := sides(high.Low95, high.High95, false)
	near := low
	if high.Value < low.Value {
		near = high
	}
	j := Judgement{Verdict: Undecided, Margin: near.Value, Leading: near.LeadingInput}
	switch {
	case badLow || badHigh:
		j.Verdict = NotMet
	case goodLow && goodHigh:
		j.Verdict = Met
	default:
		open := near
		if goodLow {
			open = high
		} else if goodHigh {
			open = low
		}
		j.Settles = settles(open, TwoSided)
	}
	return j
}

// JudgeOutside judges a value that must lie below the lower or above the upper
// of two limits, neither allowed: below is lower limit - value, above is
// value - upper limit.
func JudgeOutside(below, above Number) Judgement {
	goodBelow, badBelow := sides(below.Low95, below.High95, true)
	goodAbove, badAbove := sides(above.Low95, above.High95, true)
	near := below
	if above.Value > below.Value {
		near = above
	}
	j := Judgement{Verdict: Undecided, Margin: near.Value, Leading: near.LeadingInput}
	switch {
	case goodBelow || goodAbove:
		j.Verdict = Met
	case badBelow && badAbove:
		j.Verdict = NotMet
	default:
		j.Settles = settles(near, TwoSided)
	}
	return j
}

// settles says what would decide an undecided margin: a smaller numerical
// bound, a smaller doubt of the leading input, or both.
func settles(n Number, k float64) string {
	if !n.Exists() {
		if math.IsInf(n.Low95, -1) && math.IsInf(n.High95, 1) {
			return "there is no value to judge"
		}
		return "a longer run would tell: the record ends before the event is seen"
	}
	room := math.Abs(n.Value)
	if room == 0 {
		return "nothing: the value is the limit"
	}
	inputs := k * n.InputU
	switch {
	case math.IsNaN(inputs) || n.LeadingInput == "" && n.Numerical == 0:
		return "the answer does not exist over the whole range of the inputs"
	case n.InputU == 0 || inputs < room && n.Numerical >= inputs:
		return fmt.Sprintf("a numerical bound below %.2g %s (it is %.2g): ask for a closer agreement", room-inputs, n.Unit, n.Numerical)
	case n.Numerical >= room:
		return fmt.Sprintf("both a numerical bound well below %.2g %s (it is %.2g) and less doubt of %s", room, n.Unit, n.Numerical, n.LeadingInput)
	}
	return leadingShare(n, k, room-n.Numerical)
}

// leadingShare tells to what share the doubt of the leading input must fall for
// the whole input doubt, times k, to fit into room.
func leadingShare(n Number, k, room float64) string {
	if len(n.Contributions) == 0 || n.Basis == Sampled {
		return fmt.Sprintf("less doubt of %s", n.LeadingInput)
	}
	lead := math.Abs(n.Contributions[0].Change)
	rest := n.InputU*n.InputU - lead*lead
	left := room*room/(k*k) - rest
	if left <= 0 {
		return fmt.Sprintf("less doubt of %s, and of other inputs too", n.LeadingInput)
	}
	return fmt.Sprintf("a doubt of %s at most %.0f %% of what it is", n.LeadingInput, math.Floor(100*math.Sqrt(left)/lead))
}
