package syntax

import (
	"regexp"
	"strings"
	"sync"

	"github.com/tautspan/tautspan/dsl/diag"
)

// reportAt adds an error at a place.
func (p *parser) reportAt(a At, code, summary, found, hint string) {
	p.diags.Add(diag.Diagnostic{Code: code, Span: a.Span, Summary: summary, Found: found, Hint: hint})
}

// reportHint adds an error whose hint is the known word nearest to word.
func (p *parser) reportHint(a At, code, summary, found, word string, known []string) {
	p.reportAt(a, code, summary, found, diag.Nearest(word, known))
}

// orList joins words as a sentence lists them.
func orList(words []string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	return strings.Join(words[:len(words)-1], ", ") + " or " + words[len(words)-1]
}

// known says whether a statement begins with a word that may begin one in its
// context, and reports it where not.
func (p *parser) known(k chunk, c Context) bool {
	t := p.tokens[k.lo]
	words := StatementWords(c)
	if t.Kind == Ident && (c == InAbout || contains(words, t.Text)) {
		return true
	}
	p.broken++
	switch {
	case t.Kind == Bad:
	case t.Kind == Block:
		p.report(t, "stray-brace", "this brace belongs to no statement", "", "")
	case k.lo > 0 && continues(t):
		p.report(t, "unknown-statement", "a statement does not begin with `"+t.Text+"`",
			"to carry a statement on, end the line before with it", "")
	case t.Kind != Ident:
		p.report(t, "unknown-statement", "a statement begins with a word", "this is "+describe(t), "")
	default:
		p.unknownWord(t, c, words)
	}
	return false
}

// unknownWord speaks of a word that begins no statement here.
func (p *parser) unknownWord(t Token, c Context, words []string) {
	if p.broken > maxExplained {
		words = nil
	}
	where := "a scenario"
	if c != Top && c != InEach {
		where = "`" + string(c) + "`"
	}
	found := "no statement begins so"
	for _, other := range []Context{InLine, InStock, InRun, InReading, InRecord, InFit, InLaw, Top} {
		if other != c && contains(StatementWords(other), t.Text) {
			found = "this belongs in `" + string(other) + " { ... }`"
			if other == Top {
				found = "this stands outside of braces"
			}
			words = nil // a word of the language is no slip of the pen
			break
		}
	}
	p.reportHint(At{t.span(p.file)}, "unknown-statement", "`"+t.Text+"` is no statement of "+where, found, t.Text, words)
}

// describe names a token in a sentence.
func describe(t Token) string {
	switch t.Kind {
	case Text:
		return "a text"
	case Numeral:
		return "a number"
	case UnitTok:
		return "a unit"
	case Block:
		return "a brace"
	}
	return "`" + t.Text + "`"
}

// split divides a statement that ran on over several lines because of a comma
// at its end or an open bracket, where its grammar fails and later lines begin
// with a word that begins a statement here. Sound statements are never split.
func (p *parser) split(k chunk, c Context) []chunk {
	cuts := p.lineStarts(k, c)
	if len(cuts) == 0 || !p.fails(k, c) {
		return []chunk{k}
	}
	var parts []chunk
	lo := k.lo
	for _, at := range append(cuts, k.hi) {
		part := chunk{lo: lo, hi: at, close: -1}
		if at < k.hi {
			if last := p.tokens[at-1]; continues(last) {
				code, sign := "trailing-sign", "sign"
				if last.is(",") {
					code, sign = "trailing-comma", "comma"
				}
				p.report(last, code, "nothing follows this "+sign, "the next line begins a statement of its own", "")
				part.hi, part.quiet = max(at-1, lo+1), !last.is(",")
			}
		} else if k.block {
			part.block, part.close, part.items = true, k.close, k.items
			part.inner = blockContext(p.tokens[lo].Text)
		}
		parts = append(parts, part)
		lo = at
	}
	return parts
}

// lineStarts returns the tokens of a statement that stand first on a later
// line and begin a statement of the context or of the top.
func (p *parser) lineStarts(k chunk, c Context) []int {
	var at []int
	for i := k.lo + 1; i < k.hi; i++ {
		t := p.tokens[i]
		if t.Line == p.tokens[i-1].Line || t.Kind != Ident {
			continue
		}
		if contains(StatementWords(c), t.Text) || c != InAbout && c != InFit && contains(StatementWords(Top), t.Text) {
			at = append(at, i)
		}
	}
	return at
}

// fails says whether the grammar refuses the statement; nothing is reported.
func (p *parser) fails(k chunk, c Context) bool {
	trial := &parser{file: p.file, tokens: p.tokens, signs: map[int]bool{}}
	bare := k
	bare.items = nil
	switch c {
	case Top, InEach:
		return trial.statement(bare, c) == nil
	}
	outer := chunk{inner: c, items: []chunk{bare}}
	trial.oneItem(outer)
	return trial.broken > 0
}

// oneItem parses the single item of a block for its errors alone.
func (p *parser) oneItem(outer chunk) {
	item := outer.items[0]
	if !p.known(item, outer.inner) {
		return
	}
	switch outer.inner {
	case InStock:
		p.stockProperty(item)
	case InLine:
		p.lineItem(item)
	case InLaw:
		p.lawItem(&Law{}, item)
	case InRun:
		p.runItem(&Run{}, item)
	case InRecord:
		p.recordItem(&Record{}, item)
	case InReading:
		p.readingItem(&Reading{}, item)
	case InFit:
		p.fitItem(&Fit{}, item)
	case InAbout:
		parseRule[aboutEntryRule](p, item, InAbout)
	}
}

// maxExplained is how many failures get the full search for a wording; a text
// that is broken all over gets the short one for the rest, so that reading it
// stays quick.
const maxExplained = 200

// explain reports why a statement's grammar failed: first the likely slips,
// then what was wanted and what was found.
func (p *parser) explain(k chunk, c Context, err error) {
	tokens := p.tokens[k.lo:k.hi]
	word := tokens[0].Text
	if p.broken > maxExplained {
		p.report(tokens[0], "syntax", "this `"+word+"` statement cannot be read", "", usage(c, word))
		return
	}
	i, message := failurePlace(tokens, err)
	if p.slip(c, tokens, i, message) {
		return
	}
	d := diag.Diagnostic{Code: "syntax", Hint: usage(c, word)}
	if i < len(tokens) {
		d.Span, d.Found = tokens[i].span(p.file), "this is "+describe(tokens[i])
	} else {
		last := tokens[len(tokens)-1]
		d.Span = diag.Span{File: p.file, Start: last.End, End: last.End}
		d.Found = "the statement ends here"
	}
	if c == InAbout {
		word = "about"
	}
	if want := wanted(message); want != "" {
		d.Code, d.Summary = "wants-"+wantCode(want), "`"+word+"` wants "+want+" here"
	} else {
		d.Summary = "this does not belong to the `" + word + "` statement"
	}
	if i < len(tokens) && tokens[i].Kind == Ident {
		if near := diag.Nearest(tokens[i].Text, usageWords(c, word)); near != "" {
			d.Code, d.Hint = "unknown-word", near
		}
	}
	p.diags.Add(d)
}

// slip recognises a likely slip at token i and reports it.
func (p *parser) slip(c Context, tokens []Token, i int, message string) bool {
	if t, ok := unmatched(tokens); ok {
		if t.is(")") || t.is("]") {
			p.report(t, "stray-bracket", "this bracket closes nothing", "", "")
		} else {
			p.report(t, "open-bracket", "this bracket is not closed", "", "")
		}
		return true
	}
	last := tokens[len(tokens)-1]
	switch {
	case last.is(",") && i >= len(tokens)-1:
		p.report(last, "trailing-comma", "nothing follows this comma", "the statement ends here", "")
	case continues(last) && i >= len(tokens)-1 && len(tokens) > 1:
		p.report(last, "trailing-sign", "nothing follows this sign", "the statement ends here", "")
	case i < len(tokens) && i > 0 && tokens[i].Kind == Ident && !continues(tokens[i-1]) && c != InAbout && c != Top && c != InEach &&
		contains(StatementWords(c), tokens[i].Text) && wanted(message) == "":
		p.report(tokens[i], "same-line", "a statement begins on a line of its own", "`"+tokens[i].Text+"` begins another", "")
	case i == len(tokens)-1 && i > 1 && last.Kind == Ident && contains(strings.Fields(valueWords), last.Text):
		p.reportAt(At{diag.Span{File: p.file, Start: last.End, End: last.End}}, "wants-value", "`"+last.Text+"` wants a value here", "the statement ends here", "")
	case i == len(tokens) || i == 0:
		return false
	default:
		return p.slipAt(tokens, i)
	}
	return true
}

// valueWords are words of properties that a value must follow.
const valueWords = "mass rotary inertia axial spring dashpot friction tuned stop through loss every tension"

// slipAt recognises a likely slip by token i, which is neither the first nor
// behind the last.
func (p *parser) slipAt(tokens []Token, i int) bool {
	t, before, last := tokens[i], tokens[i-1], tokens[len(tokens)-1]
	const beside = "a value beside another stands in brackets unless it is a quantity"
	switch {
	case t.Kind == Open:
		p.report(t, "touching-bracket", "a bracket that touches the word before it begins a call", "`"+before.Text+"` takes none here", before.Text+" (")
	case tokens[0].Text == "let" && i == 2 && before.Kind == Ident && t.Kind != UnitTok && !t.is("["):
		rest := diag.Span{File: p.file, Start: t.Start, End: last.End}
		p.report(t, "missing-equals", "`let` wants `=` between name and value", "the value begins here", "let "+before.Text+" = "+firstLine(rest).Text())
	case t.is("=") && before.is("="):
		p.report(t, "double-equals", "one `=` is enough", "", "=")
	case t.is("."):
		p.report(t, "wants-name", "a name goes on behind a dot", "nothing follows this one", "")
	case (t.Kind == Sign || t.Kind == Times) && (before.Kind == UnitTok || before.Kind == Numeral || before.is(")")):
		p.report(t, "needs-brackets", beside, "the value before this sign goes on", "")
	case i > 1 && t.Kind == Ident && p.nameBesideName(tokens, i):
		p.report(t, "needs-brackets", beside, "this is a name", "("+t.Text+")")
	default:
		return false
	}
	return true
}

// nameBesideName says whether token i is a name that stands where `tuned` or
// `stop` want their values, or behind the name of a place.
func (p *parser) nameBesideName(tokens []Token, i int) bool {
	if IsKeyword(tokens[i].Text) || i+1 < len(tokens) && tokens[i+1].Kind == Open {
		return false
	}
	for j := i - 1; j > 0 && j >= i-4; j-- {
		switch t := tokens[j]; {
		case t.Kind == Ident && (t.Text == "tuned" || t.Text == "stop"):
			return true
		case t.Kind == Ident && (t.Text == "at" || t.Text == "along" || t.Text == "from" || t.Text == "to"):
			return j == i-2 && tokens[i-1].Kind == Ident
		}
	}
	return false
}

// unmatched returns the first bracket without a partner.
func unmatched(tokens []Token) (Token, bool) {
	var open []Token
	for _, t := range tokens {
		switch {
		case t.Kind == Open || t.is("(") || t.is("["):
			open = append(open, t)
		case t.is(")") || t.is("]"):
			if len(open) == 0 || (open[len(open)-1].Text == "[") != t.is("]") {
				return t, true
			}
			open = open[:len(open)-1]
		}
	}
	if len(open) > 0 {
		return open[0], true
	}
	return Token{}, false
}

// expectation finds the first thing that participle says it expected.
var expectation = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile(`\(expected \(*("[^"]*"(?: \| "[^"]*")*|<\w+>|\w+)`)
})

// wanted turns participle's expectation into words; "" where it names none.
func wanted(message string) string {
	m := expectation().FindStringSubmatch(message)
	if m == nil {
		return ""
	}
	if strings.HasPrefix(m[1], `"`) {
		var words []string
		for _, w := range strings.Split(m[1], " | ") {
			words = append(words, "`"+strings.Trim(w, `"`)+"`")
		}
		return oneOfSeveral(words)
	}
	if strings.Contains(message, "<number> <unit>?") {
		return "a value" // an operand, whose first form is a number
	}
	switch strings.TrimSuffix(m[1], "Rule") {
	case "Expr", "Operand", "Beside", "Quantity", "<sign>":
		return "a value"
	case "Label", "Name", "<word>", "Part":
		return "a name"
	case "Spot":
		return "a place"
	case "Call":
		return "a call"
	case "Span":
		return "`from`"
	case "Property", "PropertyTail":
		return "a property"
	case "WatchTail":
		return "a quantity"
	case "<text>":
		return "a text in quotes"
	case "<number>":
		return "a number"
	case "<unit>":
		return "a unit"
	case "<block>":
		return "a block in braces"
	case "Column":
		return "a column"
	}
	return ""
}

// oneOfSeveral names what a row of keywords stands for where participle lists
// only the first of several alternatives.
func oneOfSeveral(words []string) string {
	switch words[0] {
	case "`viscous`":
		return "a kind of loss"
	case "`<`":
		return "a comparison, `within` or `outside`"
	case "`by`":
		return "`by` with a length or `with` with a force"
	case "`fixed`":
		return "a property"
	case "`(`", "`)`":
		return words[0]
	}
	return orList(words)
}

// wantCode makes the code that goes with a want.
func wantCode(want string) string {
	switch want {
	case "a kind of loss":
		return "loss"
	case "a value", "a name", "a place", "a call", "a property", "a quantity", "a number", "a unit", "a column":
		return strings.TrimPrefix(want, "a ")
	case "a text in quotes":
		return "text"
	case "a block in braces":
		return "block"
	}
	return "word"
}
