package modal
import ("testing")
func TestDebug(t *testing.T){
	b:=star(3,100,1,0.3)
	w:=split(&b.m)[0]
	top,gamma,_:=w.top(13,0)
	l:=&list{e:newEvaluator(w),work:500}
	for _,s:=range w.starts(1.15*top) { if imag(s)>1.25*top||s==0 {continue}; z,ok:=l.e.newton(s,nil); g:=false; if ok {g=l.offer(z)}; if imag(z)<3||imag(s)>top*0.93 {t.Logf("start %.6g -> %.12g %v %v",s,z,ok,g)} }
	osc,re:=sortRoots(l.roots)
	t.Logf("top %g gamma %g zeros %d osc %.8g re %g",top,gamma,w.zeros,osc,re)
	edge:=l.edge(top)
	for _,y:=range []float64{0.5,1,2,3,4,6,8,10,12,14,16,18,20,21,edge}{ r:=region{-10*top,0.5/w.travel,0,y}; n,ok:=l.e.count(r); t.Logf("%g: %d %v inside %d",y,n,ok,l.inside(r)) }
}
