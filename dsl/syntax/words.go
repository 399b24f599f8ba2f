package syntax

import (
	"slices"
	"strings"
	"sync"
)

// keywordText lists every word that the grammar knows. A keyword is never
// read as a unit; as a name it stays free, since the grammar always knows
// whether it wants a name or a word.
const keywordText = `
about absorbing agree along and area at axial
bending below best between both by
channel clamped clause collect
dashpot decay density diameter displacement down
each effort every excite expansion
fit fixed for force free frequency friction from
geometric guided
holds hinge hysteretic
impedance incline included inertia internal it
joint
largest law let limit line load loss
mass meet move
note
of outside over
peaks pinned plane pluck press push
rate ratio reading record require returns roll rotary run
sag sample seed seek segment shared sideways slack smallest solvers spring start starting state steps
stock stop strength stretch support swings
takes tautspan tension through tie time title to took tuned turning
uncalibrated unit until up use using
vary velocity vertical viscous
watch weighted wires with within
young
`

// Keywords returns every word of the grammar, in alphabetical order.
func Keywords() []string {
	words := strings.Fields(keywordText)
	slices.Sort(words)
	return words
}

// IsKeyword says whether a word belongs to the grammar. Keywords win over units.
func IsKeyword(word string) bool { return keywordSet()[word] }

// keywordSet is the set of keywords, made once and never changed.
var keywordSet = sync.OnceValue(func() map[string]bool {
	set := map[string]bool{}
	for _, w := range Keywords() {
		set[w] = true
	}
	return set
})

// Context is a kind of block, which decides what statements may stand in it.
type Context string

// The contexts: the top of a file, and one for each statement with a block.
const (
	Top         Context = "file"
	InAbout     Context = "about"
	InStock     Context = "stock"
	InLine      Context = "line"
	InLaw       Context = "law"
	InRun       Context = "run"
	InRecord    Context = "record"
	InReading   Context = "reading"
	InFit       Context = "fit"
	InEach      Context = "each"
	noContext   Context = ""
	topWordText         = "tautspan title note about let use stock line each tie law excite watch run require record reading seek fit vary sample collect best meet"
)

// StatementWords returns the words that begin a statement in a context, in
// the order in which the language presents them; nil for an about block,
// whose keys are free.
func StatementWords(c Context) []string {
	switch c {
	case Top, InEach:
		return strings.Fields(topWordText)
	case InStock:
		return strings.Fields("mass axial bending density young area diameter wires strength expansion loss")
	case InLine:
		return strings.Fields("tension incline sag stretch plane at support segment joint about")
	case InLaw:
		return strings.Fields("takes state force")
	case InRun:
		return strings.Fields("for every agree solvers effort limit")
	case InRecord:
		return strings.Fields("time channel about")
	case InReading:
		return strings.Fields("frequency peaks returns swings decay about")
	case InFit:
		return strings.Fields("to using")
	}
	return nil
}

// blockContext returns the context inside the block of a statement that
// begins with word, or noContext where such a statement has no block.
func blockContext(word string) Context {
	switch c := Context(word); c {
	case InAbout, InStock, InLine, InLaw, InRun, InRecord, InReading, InFit, InEach:
		return c
	}
	return noContext
}
