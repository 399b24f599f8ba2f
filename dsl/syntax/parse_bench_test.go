package syntax

import (
	"fmt"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl/diag"
)

// bigScenario is a sound text of about the given number of lines.
func bigScenario(lines int) string {
	var b strings.Builder
	b.WriteString("tautspan 1\nstock strand {\n    mass 18.4 kg/m\n    axial 610 MN\n}\n")
	for i := 0; i*10 < lines; i++ {
		fmt.Fprintf(&b, `let pull%d = 412 kN + %d * 3 kN +- 2 %% at 95 %%
line stay%d {
    tension  pull%d * (1 - 2 * 0.01)
    support  deck    fixed
    segment  lower   strand 12.0 m
    joint    clamp   mass 18 kg, dashpot 4.8 kN*s/m   # the damper
    segment  upper   strand 148.5 m
    support  saddle  spring 4.2 MN/m
}
require peak(mid%d.displacement) < 250 mm "clear of the rail"
`, i, i, i, i, i)
	}
	return b.String()
}

func BenchmarkParse5000Lines(b *testing.B) {
	f := diag.NewFile("big.taut", bigScenario(5000))
	b.ReportAllocs()
	for b.Loop() {
		if _, l := Parse(f); len(l) > 0 {
			b.Fatal(l.Text(3))
		}
	}
}

func BenchmarkScan5000Lines(b *testing.B) {
	f := diag.NewFile("big.taut", bigScenario(5000))
	b.SetBytes(int64(len(f.Text())))
	for b.Loop() {
		Scan(f)
	}
}
