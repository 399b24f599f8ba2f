package syntax

import (
	"fmt"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/dsl/diag"
)

// read parses a text that must be sound.
func read(t *testing.T, text string) []Statement {
	t.Helper()
	tree, list := Parse(diag.NewFile("t.taut", "tautspan 1\n"+text))
	if len(list) > 0 {
		t.Fatalf("%s", list.Text(0))
	}
	return tree.Statements[1:]
}

func expect(t *testing.T, got, want string) {
	t.Helper()
	if got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}

// words joins values with blanks.
func words(values ...any) string { return strings.TrimSpace(fmt.Sprintln(values...)) }

func showDoubt(d *Doubt) string {
	if d == nil {
		return "exact"
	}
	if d.Between {
		return show(d.Low) + " to " + show(d.High) + " level " + show(d.Level)
	}
	return fmt.Sprintf("+-%s it=%v level %s", show(d.Spread), d.OfIt, show(d.Level))
}

func showSpot(s *Spot) string {
	if s == nil {
		return "nowhere"
	}
	if s.Offset == nil {
		return show(s.Name)
	}
	return show(s)
}

func showWhere(ps []AtPart) string {
	var out []string
	for _, p := range ps {
		if p.Spot != nil {
			out = append(out, showSpot(p.Spot))
		} else {
			out = append(out, show(p.Value))
		}
	}
	return strings.Join(out, " ")
}

func showProperty(p Property) string {
	out := p.Word.Text
	for _, part := range []struct {
		name string
		e    Expr
	}{{"", p.Value}, {" k=", p.Stiffness}, {" c=", p.Dashpot}, {" through=", p.Through}, {" loss=", p.Loss}} {
		if part.e != nil {
			out += " " + strings.TrimSpace(part.name) + show(part.e)
		}
	}
	if p.Side.Text != "" {
		out += " " + p.Side.Text
	}
	if p.Call != nil {
		out += " " + show(p.Call)
	}
	return out
}

func TestLet(t *testing.T) {
	for text, want := range map[string]string{
		"412 kN":                          "412'kN' exact at ",
		"412 kN +- 2 %":                   "412'kN' +-2'%' it=false level none at ",
		"412 kN +- 2 % at 95 %":           "412'kN' +-2'%' it=false level 95'%' at ",
		"0.4 % +- 7 % of it":              "0.4'%' +-7'%' it=true level none at ",
		"between 3 N and 5 N":             "none 3'N' to 5'N' level none at ",
		"4 N between 3 N and 5 N":         "4'N' 3'N' to 5'N' level none at ",
		"3 N +- 1 N at 24 degC at deck":   "3'N' +-1'N' it=false level none at 24'degC' deck",
		"3 N at upper 12 m":               "3'N' exact at upper@12'm'",
		"3 N ± 1 N at 95 % at (warm + w)": "3'N' +-1'N' it=false level 95'%' at (warm+w)",
	} {
		l := read(t, "let a = "+text)[0].(*Let)
		expect(t, show(l.Value)+" "+showDoubt(l.Doubt)+" at "+showWhere(l.Where), want)
	}
}

func TestLine(t *testing.T) {
	l := read(t, `line hanger[ROW.mark] {
    tension pull at mean
    incline 30 deg
    sag included
    plane sideways
    at 17 degC
    support deck spring 4 MN/m loss 0.1, turning
    segment lower ROW.rope ROW."L [m]" - 2 m, tension 3 N, loss ratio 2 % at 3 Hz, every 6 m from 2 m mass 1 kg, dashpot c
    joint a fixed mass 3 kg, dashpot c through k, tuned 3 kg (s / 2) loss 0.3, tuned 1 kg 2 N/m 3 N*s/m
    joint b stop 3 mm (k) both, impedance table("b.csv", "f" unit Hz), law "far"(a = 1), holds
    joint c
    support top fixed
}`)[0].(*Line)
	expect(t, l.Name.Text+" "+show(l.Name.Index), "hanger ROW.mark")
	var got []string
	for _, item := range l.Items {
		switch x := item.(type) {
		case *LineProperty:
			got = append(got, fmt.Sprintf("%s %s %s %s", x.Word.Text, show(x.Value), showSpot(x.Spot), x.Choice.Text))
		case *Support:
			s := "support " + x.Name.Text
			for _, p := range x.Properties {
				s += ", " + showProperty(p)
			}
			got = append(got, s)
		case *Joint:
			s := "joint " + x.Name.Text
			for _, p := range x.Properties {
				s += ", " + showProperty(p)
			}
			got = append(got, s)
		case *Segment:
			s := fmt.Sprintf("segment %s of %s, %s, tension %s", x.Name.Text, show(x.Stock), show(x.Length), show(x.Tension))
			for _, l := range x.Losses {
				s += fmt.Sprintf(", loss %s %s at %s", l.Kind.Text, show(l.Value), show(l.AtF))
			}
			for _, e := range x.Every {
				s += fmt.Sprintf(", every %s from %s", show(e.Spacing), show(e.First))
				for _, p := range e.Properties {
					s += ", " + showProperty(p)
				}
			}
			got = append(got, s)
		}
	}
	expect(t, strings.Join(got, "\n"), `tension pull mean 
incline 30'deg' nowhere 
sag none nowhere included
plane none nowhere sideways
at 17'degC' nowhere 
support deck, spring 4'MN/m' loss=0.1, turning
segment lower of ROW.rope, (ROW."L [m]"-2'm'), tension 3'N', loss ratio 2'%' at 3'Hz', every 6'm' from 2'm', mass 1'kg', dashpot c
joint a, fixed, mass 3'kg', dashpot c through=k, tuned 3'kg' k=(s/2) loss=0.3, tuned 1'kg' k=2'N/m' c=3'N*s/m'
joint b, stop 3'mm' k=k both, impedance table("b.csv", "f" in 'Hz'), law "far"(a=1), holds
joint c
support top, fixed`)
}

func TestStockAndLaw(t *testing.T) {
	s := read(t, `stock rope {
    mass 3 kg/m
    wires 55 of 5 mm
    loss hysteretic 2 * z of bending
    loss hysteretic 0.1
    loss internal 3 ms
    loss law "foreign"(a = 3 N)
}`)[0].(*Stock)
	var got []string
	for _, p := range s.Properties {
		x := p.Word.Text + " " + show(p.Value) + " " + show(p.Of)
		if l := p.Loss; l != nil {
			x += fmt.Sprintf(" %s %s bending=%v", l.Kind.Text, show(l.Value), l.OfBending)
			if l.Law != nil {
				x += " " + show(l.Law)
			}
		}
		got = append(got, x)
	}
	expect(t, s.Name.Text+"\n"+strings.Join(got, "\n"), `rope
mass 3'kg/m' none
wires 55 5'mm'
loss none none hysteretic (2*z) bending=true
loss none none hysteretic 0.1 bending=false
loss none none internal 3'ms' bending=false
loss none none law none bending=false "foreign"(a=3'N')`)

	l := read(t, `law slider {
    takes hold unit N, soft unit m/s, k unit 1, n
    state z = 0 rate v / soft - z
    force = hold * z
}`)[0].(*Law)
	takes := ""
	for _, x := range l.Takes {
		u := "none"
		if x.Unit != nil {
			u = x.Unit.Text
		}
		takes += x.Name.Text + ":" + u + " "
	}
	expect(t, takes, "hold:N soft:m/s k:1 n:none ")
	expect(t, l.States[0].Name.Text+" "+show(l.States[0].Initial)+" "+show(l.States[0].Rate), "z 0 ((v/soft)-z)")
	expect(t, show(l.Forces[0].Value), "(hold*z)")
}

func TestExcite(t *testing.T) {
	for text, want := range map[string]string{
		"pluck at upper 67 m with 2 kN until 3 s": "pluck upper@67'm' by none with 2'kN' until 3's'",
		"pluck at upper (reach) by 20 mm":         "pluck upper@reach by 20'mm' with none until none",
		"start velocity along upper = 3 * x":      "start velocity upper (3*x)",
		"push at a.b 50 % with sine(3 N, 2 Hz)":   "push a.b@50'%' sine(3'N', 2'Hz')",
		"press along stay with 3 N/m * t":         "press stay (3'N/m'*t)",
		"move deck with step(3 mm, 1 s)":          "move deck step(3'mm', 1's')",
		"roll along w at 9 m/s load 3 N mass 1 kg spring 2 N/m dashpot 4 N*s/m from a 3 m starting 2 s": "roll w 9'm/s' 3'N' 1'kg' 2'N/m' 4'N*s/m' a@3'm' 2's'",
		`load "gusty"(n = 4) along stay`: `load "gusty"(n=4) true stay`,
		`load "gusty" at upper 3 m`:      `load "gusty"() false upper@3'm'`,
	} {
		var got string
		switch a := read(t, "excite e "+text)[0].(*Excite).Action.(type) {
		case *Pluck:
			got = fmt.Sprintf("pluck %s by %s with %s until %s", showSpot(a.Spot), show(a.By), show(a.With), show(a.Until))
		case *Start:
			got = fmt.Sprintf("start %s %s %s", a.Quantity.Text, showSpot(a.Along), show(a.Shape))
		case *Push:
			got = fmt.Sprintf("push %s %s", showSpot(a.Spot), show(a.With))
		case *Press:
			got = fmt.Sprintf("press %s %s", showSpot(a.Along), show(a.With))
		case *Move:
			got = fmt.Sprintf("move %s %s", showSpot(a.Support), show(a.With))
		case *Roll:
			got = fmt.Sprintf("roll %s %s %s %s %s %s %s %s", showSpot(a.Along), show(a.Speed), show(a.Load), show(a.Mass),
				show(a.Spring), show(a.Dashpot), showSpot(a.From), show(a.Starting))
		case *Load:
			got = fmt.Sprintf("load %s %v %s", show(&a.Plugin), a.Along, showSpot(a.Spot))
		}
		expect(t, got, want)
	}
}

func TestReading(t *testing.T) {
	r := read(t, `reading hand of hanger[ROW.mark] {
    about { instrument "watch" }
    frequency 1 = 1.012 Hz +- 0.004 Hz
    frequency ? = 3.5 Hz vertical at 17 degC
    peaks 6.45, 8.10, 26.95 Hz +- 0.15 %
    returns 5 took 4.38 s +- 0.05 s at 90 % shared +- 0.10 s at 95 % at deck
    decay n + 1 = 0.42 % between 0.4 % and 0.5 %
}`)[0].(*Reading)
	expect(t, r.Name.Text+" "+show(r.Of)+" "+r.Abouts[0].Entries[0].Key.Text, "hand hanger[ROW.mark] instrument")
	var got []string
	for _, x := range r.Items {
		var values []string
		for _, v := range x.Values {
			values = append(values, show(v))
		}
		got = append(got, fmt.Sprintf("%s %s = %s | %s | %s | %s | %s", x.Word.Text, show(x.Order), strings.Join(values, " "),
			showDoubt(x.Doubt), showDoubt(x.Shared), x.Plane.Text, showWhere(x.Where)))
	}
	expect(t, strings.Join(got, "\n"), `frequency 1 = 1.012'Hz' | +-0.004'Hz' it=false level none | exact |  | 
frequency none = 3.5'Hz' | exact | exact | vertical | 17'degC'
peaks none = 6.45 8.10 26.95'Hz' | +-0.15'%' it=false level none | exact |  | 
returns 5 = 4.38's' | +-0.05's' it=false level 90'%' | +-0.10's' it=false level 95'%' |  | deck
decay (n+1) = 0.42'%' | 0.4'%' to 0.5'%' level none | exact |  | `)
}

func TestQuestions(t *testing.T) {
	s := read(t, `watch mid[3] at upper 68 m displacement, velocity mass 0.2 kg
watch whole along stay force
require peak(mid.force) <= 250 mm "clear" clause "4.2"
require tension(stay) within 294.5 .. 325.5 kN
record shake "file.wav" {
    time 1 unit s
    channel "b" uncalibrated for mid.velocity
    channel 2 unit m/s^2 for mid.acceleration
}
seek pull from 3 kN to 5 kN
fit {
    to hand, shake
    using frequencies 1..6, returns
}
vary knob from 1 to 8 N, 12 steps, geometric
vary knob through 1, 2, 4 kN
vary n normal(3 m, 2 %)
sample 200, seed 7
collect frequency(1..4),
    sag(stay)
best damping(1) smallest over knob from 1 N to 9 N
meet frequency(1..8) with two, four over depth from 40 m to 1150 m
tie c from a.upper 12 m to b.lower 50 % spring 3 N/m, slack
each ROW of "h.csv" {
    line l[ROW.mark] {
    }
}
run {
    for 40 s
    solvers differences, "far"
    effort quick
    limit memory 2 GB
}`)
	w := s[0].(*Watch)
	expect(t, words(w.Name.Text, show(w.Name.Index), w.Along, showSpot(w.Spot), w.Quantities[1].Text, show(w.Mass)), "mid 3 false upper@68'm' velocity 0.2'kg'")
	expect(t, words(s[1].(*Watch).Along, showSpot(s[1].(*Watch).Spot)), "true stay")
	q := s[2].(*Require)
	expect(t, show(q.Value)+q.Test.Text+show(q.Limit)+q.Text.Text+q.Clause.Text, "peak(mid.force)<=250'mm'clear4.2")
	q = s[3].(*Require)
	expect(t, show(q.Value)+q.Test.Text+show(q.Low)+" "+show(q.High), "tension(stay)within294.5 325.5'kN'")
	r := s[4].(*Record)
	expect(t, words(r.Name.Text, r.Path.Text, show(r.Times[0].Column), r.Times[0].Unit.Text, show(r.Channels[0].Column), r.Channels[0].Uncalibrated,
		show(r.Channels[0].For), show(r.Channels[1].Column), r.Channels[1].Unit.Text), `shake file.wav 1 s "b" true mid.velocity 2 m/s^2`)
	k := s[5].(*Seek)
	expect(t, show(k.Name)+show(k.From)+show(k.To), "pull3'kN'5'kN'")
	f := s[6].(*Fit)
	expect(t, show(f.To[1])+f.Using[0].What.Text+show(f.Using[0].Which)+f.Using[1].What.Text+show(f.Using[1].Which), "shakefrequencies1..6returnsnone")
	v := s[7].(*Vary)
	expect(t, words(show(v.From), show(v.To), show(v.Steps), v.Geometric), "1 8'N' 12 true")
	expect(t, show(s[8].(*Vary).Through[2])+show(s[9].(*Vary).Draw), "4'kN'normal(3'm', 2'%')")
	expect(t, show(s[10].(*Sample).Count)+" "+show(s[10].(*Sample).Seed), "200 7")
	expect(t, show(s[11].(*Collect).Values[0])+show(s[11].(*Collect).Values[1]), "frequency(1..4)sag(stay)")
	b := s[12].(*Best)
	expect(t, show(b.Value)+b.Goal.Text+show(b.Over)+show(b.From)+show(b.To), "damping(1)smallestknob1'N'9'N'")
	m := s[13].(*Meet)
	expect(t, show(m.Value)+show(m.With[1])+show(m.Over)+show(m.From)+show(m.To), "frequency(1..8)fourdepth40'm'1150'm'")
	c := s[14].(*Tie)
	expect(t, showSpot(c.From)+showSpot(c.To)+showProperty(c.Properties[0])+showProperty(c.Properties[1]), "a.upper@12'm'b.lower@50'%'spring 3'N/m'slack")
	e := s[15].(*Each)
	expect(t, e.Row.Text+e.Table.Text+e.Statements[0].(*Line).Name.Text, "ROWh.csvl")
	run := s[16].(*Run)
	expect(t, words(show(run.Items[0].Value), run.Items[1].Solvers[0].Text, run.Items[1].Solvers[1].Quoted, run.Items[2].Choice.Text,
		run.Items[3].Choice.Text, show(run.Items[3].Value)), "40's' differences true quick memory 2'GB'")
}

// TestRecovery: what is sound beside a mistake is in the tree.
func TestRecovery(t *testing.T) {
	tree, list := Parse(diag.NewFile("r.taut", "tautspan 1\nlet a 3\nline stay {\n support x\n support b fixed\n}\nlet c = (4\nrun {\n for 3 s\n}\n"))
	if len(list) != 3 {
		t.Fatalf("%s", list.Text(0))
	}
	b := tree.Statements[1].(*Broken)
	expect(t, b.Word.Text+" "+b.Name, "let a")
	l := tree.Statements[2].(*Line)
	if !l.Incomplete || len(l.Items) != 1 || l.Items[0].(*Support).Name.Text != "b" {
		t.Errorf("%+v", l)
	}
	if r, ok := tree.Statements[4].(*Run); !ok || r.Incomplete || len(r.Items) != 1 {
		t.Errorf("%T", tree.Statements[4])
	}
}

// TestLimits: what is too large, too deep or too long is refused in words.
func TestLimits(t *testing.T) {
	deep := strings.Repeat("(", 100000)
	for name, c := range map[string]struct{ text, code string }{
		"size":     {strings.Repeat("#", MaxBytes+1), "file-too-large"},
		"brackets": {"tautspan 1\nlet a = " + deep + "1", "too-deep"},
		"braces":   {"tautspan 1\n" + strings.Repeat("each a of \"b\" {\n", 100000), "too-deep"},
		"length":   {"tautspan 1\nlet a = 1" + strings.Repeat("+1", 100000), "too-long"},
		"powers":   {"tautspan 1\nlet a = 1" + strings.Repeat("^-1", 100000), "too-long"},
		"signs":    {"tautspan 1\nlet a = " + strings.Repeat("-", 100000) + "1", "too-long"},
		"empty":    {"", "missing-version"},
		"remarks":  {"# nothing\n", "missing-version"},
		"bytes":    {"tautspan 1\nlet a = \xff\xfe3\n", "bad-bytes"},
		"text":     {"tautspan 1\ntitle \"\xff\"\n", "bad-bytes"},
	} {
		tree, list := Parse(diag.NewFile("l.taut", c.text))
		found := false
		for _, d := range list {
			found = found || d.Code == c.code
		}
		if tree == nil || !found {
			t.Errorf("%s: no %s\n%s", name, c.code, list.Text(5))
		}
	}
}

// TestCRLF: lines may end as on any machine, and a byte order mark is let pass.
func TestCRLF(t *testing.T) {
	tree, list := Parse(diag.NewFile("c.taut", "\uFEFFtautspan 1\r\ntitle \"x\"   # y\r\nlet a = 3 +\r\n 4 m\r\n"))
	if len(list) > 0 || len(tree.Statements) != 3 || tree.Comments[0].Text != "# y" {
		t.Errorf("%d statements, comments %v\n%s", len(tree.Statements), tree.Comments, list.Text(0))
	}
}
