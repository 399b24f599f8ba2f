package modal
import ("testing";"math/rand";"time";"math")
func TestStress(t *testing.T){
	r:=rand.New(rand.NewSource(77))
	bad:=0; var worst time.Duration; var sum time.Duration
	for k:=0;k<1500;k++{
		m:=randomNetwork(r,true)
		t0:=time.Now()
		res,err:=Find(m,Want{Count:10, Shapes:k%3==0})
		d:=time.Since(t0); sum+=d
		if d>worst {worst=d; t.Logf("%d: %v",k,d)}
		if err!=nil || res.CompleteBelow==0 {bad++; t.Logf("%d: %v %v",k,err,res)}
		for _,md:=range res.Modes { if md.Multiplicity>1 {t.Logf("%d mult %v",k,md)}
		 if !(md.Decay>=0) {t.Logf("%d decay %v",k,md)} }
	}
	t.Logf("bad %d mean %v worst %v",bad,sum/1500,worst)
	for k:=0;k<1000;k++{
		m:=randomNetwork(r,false)
		res,err:=Find(m,Want{Count:15})
		if err!=nil {t.Fatal(err)}
		for g,w:=range split(m){
			var got []float64
			for _, mode := range res.Modes { if mode.Group == g { got = append(got, imag(mode.S)) } }
			want := w.denseOmegas(2 * got[len(got)-1])[w.rigid:]
			for i:=range got { if math.Abs(got[i]/want[i]-1)>1e-8 {t.Logf("undamped %d %d %d %g %g",k,g,i,got[i],want[i])}}
		}
	}
}
