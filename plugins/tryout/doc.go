// Package tryout is the conformance kit for plugins: what `tautspan plugins try`
// runs and an author's test can run, without a process:
//
//	func TestMine(t *testing.T) {
//		for _, c := range tryout.Run(context.Background(), mySolver{}) {
//			if c.Failed() {
//				t.Error(c)
//			}
//		}
//	}
//
// With package author it is what outside authors may rely on within protocol 1.
package tryout
