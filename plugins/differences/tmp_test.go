package differences
import ("testing";"math";"time";"github.com/tautspan/tautspan/engine/solver";"github.com/tautspan/tautspan/engine/scenario")
func TestB1(t *testing.T){
 L,m,T,c:=20.0,0.35,8400.0,0.05
 hat:=triangle(L,4,0.02)
 b:=0.2
 sl,sr:=0.02/4,-0.02/16
 f:=func(x float64)float64{ d:=x-4; if math.Abs(d)<b { // parabola tangent to both flanks
   return hat(4-b)+sl*(d+b)+(sr-sl)*(d+b)*(d+b)/(4*b)}; return hat(x)}
 ms:=line(0.0005,20001,stretch1{L,m,T,c}); ms.Jump=2; ms.Pieces[0].Start=f
 watchAt(ms,scenario.Displacement,0,7,0)
 N:=4000
 // coefficients by closed form: f'' = (sr-sl)/(2b) on |d|<b
 co:=make([]float64,N+1)
 for n:=1;n<=N;n++{ k:=float64(n)*math.Pi/L
   // int f sin = -(1/k^2) int f'' sin (f(0)=f(L)=0)
   I:=(sr-sl)/(2*b)*(math.Cos(k*(4-b))-math.Cos(k*(4+b)))/k
   co[n]=2/L*(-1/(k*k))*I}
 g:=c/(2*m); cw:=math.Sqrt(T/m)
 var idx []int; var want []float64
 for i:=0;i<20001;i+=40{ tt:=float64(i)*0.0005; s:=0.0
  for n:=1;n<=N;n++{ k:=float64(n)*math.Pi/L; w:=math.Sqrt(k*k*cw*cw-g*g)
   s+=co[n]*math.Sin(k*7)*(math.Cos(w*tt)+g/w*math.Sin(w*tt))}
  idx=append(idx,i); want=append(want,s*math.Exp(-g*tt))}
 for level:=0;level<6;level++{
  t0:=time.Now(); res:=solve(t,ms,solver.Request{Level:level,Effort:1}); el:=time.Since(t0)
  got:=make([]float64,len(idx)); for j,i:=range idx{got[j]=res.Series[0][0][i]}
  t.Logf("level %d cells %d steps %d err %.3g time %v %v",level,res.Plan.Cells,res.Plan.Steps,distance(got,want),el,res.Notes)
 }
}
