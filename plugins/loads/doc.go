// Package loads holds the loads that tautspan carries, written as an author's
// would be (package author), and turns the loads of a scenario, built in or of a
// plugin, into forces that every solver can take.
package loads

import "github.com/tautspan/tautspan/plugins/author"

// BuiltIn lists the loads that the program carries.
func BuiltIn() []author.Load { return []author.Load{vortex{}, wind{}, iceDrop{}, walker{}} }
