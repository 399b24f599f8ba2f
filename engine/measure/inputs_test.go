package measure

import (
	"reflect"
	"strings"
	"testing"

	"github.com/tautspan/tautspan/engine/formula"
	"github.com/tautspan/tautspan/engine/scenario"
)

// filler puts a let of its own into every program of a structure.
type filler struct{ names []string }

func (f *filler) fill(v reflect.Value, path string) {
	switch v.Kind() {
	case reflect.Struct:
		if v.Type() == reflect.TypeOf(formula.Program{}) {
			v.Set(reflect.ValueOf(formula.Let(len(f.names))))
			f.names = append(f.names, path)
			return
		}
		for i := range v.NumField() {
			f.fill(v.Field(i), path+"."+v.Type().Field(i).Name)
		}
	case reflect.Pointer:
		v.Set(reflect.New(v.Type().Elem()))
		f.fill(v.Elem(), path)
	case reflect.Slice:
		if v.Type().Elem().Kind() == reflect.Struct {
			v.Set(reflect.MakeSlice(v.Type(), 1, 1))
			f.fill(v.Index(0), path)
		}
	}
}

// Every number of a scenario that an answer may hang on is seen, so that a let in
// it is named among those taken as exact. What no answer hangs on: strength, which
// only warns; the times at which a history may jump, which its value tells; the
// limits of a run, and what it has to agree within.
func TestEveryInputIsSeen(t *testing.T) {
	var m scenario.ModelOf[formula.Program]
	f := &filler{}
	f.fill(reflect.ValueOf(&m).Elem(), "")
	if len(f.names) < 80 {
		t.Fatalf("only %d programs were found", len(f.names))
	}
	seen := reads{}
	seen.structure(&m)
	seen.happenings(&m)
	seen.matter(&m)
	for i, name := range f.names {
		spare := false
		for _, word := range []string{".Strength", ".Breaks", ".Run.Agree", ".Run.Limit", ".Joint.AxialGive"} {
			spare = spare || strings.Contains(name, word)
		}
		if seen[i] == spare {
			t.Errorf("%s: seen %v", name, seen[i])
		}
	}
}
