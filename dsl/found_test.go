package dsl

import (
	"strings"
	"testing"
	"testing/fstest"
)

// Found values take the place of those of their lets, in the units in which they
// were written; every other byte of the text stays, and what was an expression is
// kept in a comment.
func TestPutIn(t *testing.T) {
	main := "tautspan 1\r\n" +
		"use \"lets.taut\"\n" +
		"let pull = 310 kN +- 5 %   # from the drawing\n" +
		"let stiff = between 4 and 50 kN*m^2\n" +
		"let twice = 2 * base   # not a plain number\n" +
		"let share = 3 % +- 1 %\n" +
		"# a remark\n" +
		"seek pull from 50 kN +\n    50 kN to 900 kN\n" +
		"seek stiff from 4 kN*m^2 to 50 kN*m^2\n"
	c := Compile(fstest.MapFS{"a.taut": {Data: []byte(main)}, "lets.taut": {Data: []byte("tautspan 1\nlet base = 3 m\nlet other = 3 m\n")}}, "a.taut", Options{})
	if c.Diagnostics.HasErrors() {
		t.Fatal(c.Diagnostics.Text(5))
	}
	text, written := c.PutIn([]Found{{"pull", 302123, 2345}, {"stiff", 27500, 800}, {"twice", 6.1, 0.02}, {"share", 0.0312, 0.0004}, {"other", 3.1, 0.1}})
	want := "tautspan 1\r\n" +
		"use \"lets.taut\"\n" +
		"let pull = 302.1 kN +- 2.3 kN   # from the drawing\n" +
		"let stiff = 27.5 kN*m^2 +- 0.8 kN*m^2\n" +
		"let twice = 6.1 m +- 0.02 m  # was 2 * base   # not a plain number\n" +
		"let share = 3.12 % +- 0.04 %\n" +
		"# a remark\n" +
		"# seek pull from 50 kN +\n#     50 kN to 900 kN\n" +
		"# seek stiff from 4 kN*m^2 to 50 kN*m^2\n"
	if text != want {
		t.Errorf("got\n%s\nwant\n%s", text, want)
	}
	if strings.Join(written, " ") != "pull stiff twice share" {
		t.Errorf("written %v", written)
	}
	again := Compile(fstest.MapFS{"a.taut": {Data: []byte(text)}, "lets.taut": {Data: []byte("tautspan 1\nlet base = 3 m\nlet other = 3 m\n")}}, "a.taut", Options{})
	if again.Diagnostics.HasErrors() {
		t.Error(again.Diagnostics.Text(5))
	}
	if c.WrittenUnit("stiff") != "kN*m^2" || c.WrittenUnit("twice") != "" || c.WrittenUnit("other") != "m" {
		t.Errorf("units %q %q %q", c.WrittenUnit("stiff"), c.WrittenUnit("twice"), c.WrittenUnit("other"))
	}
}
