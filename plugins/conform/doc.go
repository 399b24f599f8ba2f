// Package conform is the test kit that every solver must pass, built-in or
// foreign: manufactured solutions for each feature, alone and together, and the
// changes of a scenario that must not change its answers.
//
// A manufactured solution starts from a chosen motion u(x, t); the loads that
// produce it follow from the equations
//
//	press  q = m u_tt + c u_t - T u_xx            along every segment
//	push   F = M u_tt + C u_t + K u - [T u_x]     at every node
//
// ([.] the jump from before to after), so that the exact answer is known for any
// combination of features, with no solver asked.
package conform
