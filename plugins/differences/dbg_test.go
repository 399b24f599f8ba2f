package differences
import ("testing";"context";"github.com/tautspan/tautspan/engine/mesh";"github.com/tautspan/tautspan/engine/solver";"github.com/tautspan/tautspan/engine/scenario")
func TestDbg(t *testing.T){
 mods := map[string]func(m *mesh.Mesh){
 "none": func(m *mesh.Mesh){},
 "norolls": func(m *mesh.Mesh){m.Rolls=nil},
 "nopush": func(m *mesh.Mesh){m.Pushes=nil},
 "nopress": func(m *mesh.Mesh){m.Presses=nil},
 "nobr": func(m *mesh.Mesh){m.Nodes[1].Brackets=nil},
 "nomotion": func(m *mesh.Mesh){m.Nodes[0].Motion=nil},
 "novisc": func(m *mesh.Mesh){for i:=range m.Pieces{m.Pieces[i].Viscous=0}},
 "nolink": func(m *mesh.Mesh){for i:=range m.Links{m.Links[i].Dashpot=0}},
 }
 for k,f:=range mods{ m:=busy(true); f(m)
  _,err:=New().Solve(context.Background(),m,solver.Request{},nil); t.Log(k,err)}
 _ = scenario.Force
}
