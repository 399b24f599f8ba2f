package syntax

import (
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl/diag"
)

// show writes an expression with every operation in brackets and units in
// quotes, so that a test can say what a text means.
func show(e Expr) string {
	switch e := e.(type) {
	case nil:
		return "none"
	case *Number:
		if e.Unit != nil {
			return e.Text + "'" + e.Unit.Text + "'"
		}
		return e.Text
	case *String:
		return `"` + e.Text + `"`
	case *Name:
		var parts []string
		for _, p := range e.Parts {
			s := p.Text
			if p.Quoted {
				s = `"` + s + `"`
			}
			if p.Index != nil {
				s += "[" + show(p.Index) + "]"
			}
			parts = append(parts, s)
		}
		return strings.Join(parts, ".")
	case *Call:
		var args []string
		for _, a := range e.Args {
			s := show(a.Value)
			if a.Key != nil {
				s = a.Key.Text + "=" + s
			}
			if a.Mark != nil {
				s = a.Mark.Text + ":" + s
			}
			if a.Unit != nil {
				s += " in '" + a.Unit.Text + "'"
			}
			args = append(args, s)
		}
		return show(&Name{Parts: []Label{e.Name}}) + "(" + strings.Join(args, ", ") + ")"
	case *Unary:
		return "(" + e.Op + show(e.X) + ")"
	case *Binary:
		return "(" + show(e.X) + e.Op.Text + show(e.Y) + ")"
	case *Compare:
		return "(" + show(e.X) + e.Op.Text + show(e.Y) + ")"
	case *Range:
		return show(e.Low) + ".." + show(e.High)
	case *Group:
		return show(e.X)
	case *Spot:
		return show(e.Name) + "@" + show(e.Offset)
	}
	return "?"
}

// parseExpr reads an expression as the value of a let.
func parseExpr(t *testing.T, text string) (Expr, diag.List) {
	t.Helper()
	tree, list := Parse(diag.NewFile("e.taut", "tautspan 1\nlet a = "+text+"\n"))
	l, ok := tree.Statements[1].(*Let)
	if !ok {
		return nil, list
	}
	return l.Value, list
}

// TestExpressions: the readings are those of the language's page on words and
// tokens and of ordinary arithmetic.
func TestExpressions(t *testing.T) {
	for text, want := range map[string]string{
		"3 t":                    "3't'",
		"3t":                     "3't'",
		"3*t":                    "(3*t)",
		"3 * t":                  "(3*t)",
		"92 kN*m^2 * 2":          "(92'kN*m^2'*2)",
		"92 kN*m^2*2":            "(92'kN*m^2'*2)",
		"3 N*t":                  "3'N*t'",
		"11.5e-6 1/K":            "11.5e-6'1/K'",
		"2 1/(m*K)":              "2'1/(m*K)'",
		"0.6 N*s/m^2":            "0.6'N*s/m^2'",
		"2 W/(m^2*K)":            "2'W/(m^2*K)'",
		"2.4 kN·s/m":             "2.4'kN·s/m'",
		"3 m² + 3 m⁻²":           "(3'm²'+3'm⁻²')",
		"3 m^-2":                 "3'm^-2'",
		"4 %":                    "4'%'",
		"4 % * 3":                "(4'%'*3)",
		"67 deg":                 "67'deg'",
		"20 °C":                  "20'°C'",
		"3 µm":                   "3'µm'",
		"12 m/2":                 "(12'm'/2)",
		"12 m/(a + b)":           "(12'm'/(a+b))",
		"12 m / s":               "(12'm'/s)",
		"3 m ^ 2":                "(3'm'^2)",
		"3 m^x":                  "(3'm'^x)",
		"1e3 + 1E+3 - 2.5e-1":    "((1e3+1E+3)-2.5e-1)",
		"3 em":                   "3'em'",
		"-x^2":                   "(-(x^2))",
		"-x*y":                   "((-x)*y)",
		"2^-1":                   "(2^(-1))",
		"a^b^c":                  "(a^(b^c))",
		"a^-b^c":                 "(a^(-(b^c)))",
		"2 * -x^2^3 + 1":         "((2*(-(x^(2^3))))+1)",
		"a - b - c":              "((a-b)-c)",
		"a / b * c":              "((a/b)*c)",
		"a + b * c^2":            "(a+(b*(c^2)))",
		"a * b + c":              "((a*b)+c)",
		"(a + b) * c":            "((a+b)*c)",
		"a - -b":                 "(a-(-b))",
		"sqrt(2) * pi":           "(sqrt(2)*pi)",
		"if(A < B, 1, 2)":        "if((A<B), 1, 2)",
		"mid.displacement":       "mid.displacement",
		"upper.3":                "upper.3",
		`ROW."L [m]" + 1 m`:      `(ROW."L [m]"+1'm')`,
		"hanger[ROW.mark].upper": "hanger[ROW.mark].upper",
		"damping(1..4)":          "damping(1..4)",
		"damping(below 3 Hz)":    "damping(below:3'Hz')",
		"f(a, from before)":      "f(a, from:before)",
		"tension(upper 12 m)":    "tension(upper@12'm')",
		"tension(a.b (c + d))":   "tension(a.b@(c+d))",
		"max(below, from)":       "max(below, from)",
		`table("f", "t" unit s)`: `table("f", "t" in 's')`,
		`table("f", 2 unit 1/K)`: `table("f", 2 in '1/K')`,
		"law(hold = 2 N)":        "law(hold=2'N')",
		"3 m + # why\n 4 m":      "(3'm'+4'm')",
		"max(1,\n\n 2)":          "max(1, 2)",
		"(1\n + 2)":              "(1+2)",
	} {
		e, list := parseExpr(t, text)
		if got := show(e); got != want || len(list) > 0 {
			t.Errorf("%s: got %s, want %s\n%s", text, got, want, list.Text(0))
		}
	}
}

// TestKeywordsWinOverUnits: behind a number a word of the grammar is no unit.
func TestKeywordsWinOverUnits(t *testing.T) {
	for _, w := range Keywords() {
		tokens, _ := Scan(diag.NewFile("k.taut", "3 "+w+" 5"))
		if len(tokens) != 3 || tokens[1].Kind != Ident {
			t.Errorf("3 %s 5: %v", w, tokens)
		}
	}
	tokens, _ := Scan(diag.NewFile("k.taut", "3 min 5"))
	if len(tokens) != 3 || tokens[1].Kind != UnitTok {
		t.Errorf("3 min: %v", tokens)
	}
}

// TestGrammarWordsAreKeywords: no word of the grammar was forgotten in the
// list of keywords, and the list holds no other.
func TestGrammarWordsAreKeywords(t *testing.T) {
	used := map[string]bool{"below": true, "from": true} // marks of arguments
	for i, part := range strings.Split(Grammar(), `"`) {
		if i%2 == 1 && wordLength(part) == len(part) {
			used[part] = true
		}
	}
	for w := range used {
		if !IsKeyword(w) {
			t.Errorf("%q is in the grammar and not among the keywords", w)
		}
	}
	for _, w := range Keywords() {
		if !used[w] && !contains([]string{"acceleration", "slope", "moment"}, w) {
			t.Errorf("%q is a keyword that the grammar does not use", w)
		}
	}
}

func TestSharedUnit(t *testing.T) {
	for text, want := range map[string]string{
		"f(1, 2, 4 kN)":  "kN",
		"f(1, -2, 4 kN)": "kN",
		"f(1 N, 4 kN)":   "",
		"f(a, 4 kN)":     "",
		"f(1, 2)":        "",
		"f(4 kN)":        "",
	} {
		e, _ := parseExpr(t, text)
		var values []Expr
		for _, a := range e.(*Call).Args {
			values = append(values, a.Value)
		}
		got := ""
		if u := SharedUnit(values...); u != nil {
			got = u.Text
		}
		if got != want {
			t.Errorf("%s: got %q, want %q", text, got, want)
		}
	}
}

// TestDefinition: participle sees the scanner's tokens, comments left out.
func TestDefinition(t *testing.T) {
	const text = "let a = max(3 kN, b) # why\nlet c = [ \"x\" ]\n"
	got, err := rootParser().Lex("d.taut", strings.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	want, _ := Scan(diag.NewFile("d.taut", text))
	want = withoutRemarks(want)
	if len(got) != len(want)+1 || !got[len(got)-1].EOF() {
		t.Fatalf("%d tokens, want %d and the end", len(got), len(want))
	}
	for i, w := range want {
		if int(got[i].Type) != int(w.Kind) || got[i].Value != w.Text || got[i].Pos.Offset != w.Start {
			t.Errorf("token %d is %v, want %v", i, got[i], w)
		}
	}
}
