// Package formula holds expressions as small typed programs without units.
//
// A program is postfix code over two banks of numbers: the lets of a scenario,
// fixed for one evaluation of the whole scenario, and the arguments, which
// change from call to call (time t, place x, the displacement and velocity of a
// law, the value of a measure). The language side compiles text to programs
// once, with every number already in SI; from then on a scenario is evaluated
// again and again without text, names or units.
//
// Programs are plain data: they can be copied, compared and written out, and
// evaluation allocates nothing.
package formula
