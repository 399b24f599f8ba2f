package modal
import ("testing";"math/rand";"math";"time";"github.com/tautspan/tautspan/engine/mesh")
func star(n int, c float64, k, kd float64) *build {
	b:=&build{}
	var at []int
	for l:=0;l<n;l++{
		a:=b.node(mesh.Node{Line:l,Fixed:true}); j:=b.node(mesh.Node{Line:l,Dashpot:c}); e:=b.node(mesh.Node{Line:l,Fixed:true})
		b.piece(a,j,3,1,100,0); b.piece(j,e,7,1,100,0); at=append(at,j)
	}
	h:=b.node(mesh.Node{Line:-1,Mass:2})
	for _,j:=range at {b.link(j,h,k,kd)}
	return b
}
func TestStress(t *testing.T){
	for _,n:=range []int{2,3,4} { for _,c:=range []float64{0,0.001,1,15,20,25,100} { for _,k:=range []float64{1e-6,1e-3,1,100,1e5} {
		b:=star(n,c,k,0.3)
		t0:=time.Now()
		res:=find(t,&b.m,Want{Count:12,Shapes:true})
		mult:=map[int]int{}; def:=0
		for _,m:=range res.Modes {mult[m.Multiplicity]++; if m.Defective {def++}}
		if res.CompleteBelow==0 || def>0 || mult[n-1]==0 { t.Logf("n=%d c=%g k=%g: mult %v def %d %v complete %g notes %v",n,c,k,mult,def,time.Since(t0),res.CompleteBelow,res.Notes)}
	}}}
	// two equal lines, weak tie, different dashpots
	r:=rand.New(rand.NewSource(5))
	bad:=0; var slow time.Duration
	for i:=0;i<1500;i++{
		b:=&build{}
		var at [2]int
		c:=math.Pow(10,-3+5*r.Float64()); dc:=c*math.Pow(10,-10*r.Float64()); if r.Intn(5)==0 {dc=0}
		for l:=0;l<2;l++{
			a:=b.node(mesh.Node{Line:l,Fixed:true}); j:=b.node(mesh.Node{Line:l,Dashpot:c+dc*float64(l)}); e:=b.node(mesh.Node{Line:l,Fixed:true})
			b.piece(a,j,4,1,100,0); b.piece(j,e,6,1,100,0); at[l]=j
		}
		k:=math.Pow(10,-10+14*r.Float64())
		if i%7==0 {k=dc*3.3}
		b.link(at[0],at[1],k+1e-30,0)
		t0:=time.Now()
		res:=find(t,&b.m,Want{Count:10,Shapes:true})
		if d:=time.Since(t0);d>slow{slow=d}
		if res.CompleteBelow==0 {bad++; t.Logf("c=%g dc=%g k=%g: %v",c,dc,k,res.Notes)}
	}
	t.Logf("bad %d slow %v",bad,slow)
}
