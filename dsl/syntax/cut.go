package syntax

import "github.com/tautspan/tautspan/dsl/diag"

// chunk is one statement before its grammar is applied: a range of tokens,
// and the statements of its block.
type chunk struct {
	lo, hi int // tokens of the head, half-open, with the `{` where there is one
	block  bool
	close  int // index of the `}`, or -1
	inner  Context
	items  []chunk
	quiet  bool // its mistake was reported before
}

// cut divides tokens[i:end] into statements of a context. In a block (open is
// the index of its `{`, else -1) it stops at the closing brace, and says
// whether it found one.
func (p *parser) cut(i, end int, c Context, open int) (chunks []chunk, next int, closed bool) {
	for i < end {
		t := p.tokens[i]
		switch {
		case t.is("}") && open >= 0:
			return chunks, i, true
		case t.is("}"):
			p.report(t, "stray-brace", "this brace closes nothing", "", "")
			i++
			continue
		case open >= 0 && p.leftBlock(i, c):
			return chunks, i, false
		case i > 0 && p.tokens[i-1].is("}") && p.tokens[i-1].Line == t.Line:
			p.report(t, "same-line", "a statement begins on a line of its own", "", "")
		}
		var k chunk
		k, i = p.head(i, end)
		chunks = append(chunks, k)
	}
	return chunks, i, false
}

// leftBlock says whether token i begins a statement that can only stand
// outside the block, in a file that has more opening than closing braces: then
// the block's brace was forgotten.
func (p *parser) leftBlock(i int, c Context) bool {
	t := p.tokens[i]
	if !p.unclosed || t.Kind != Ident || p.tokens[i-1].Line == t.Line || c == InAbout || c == InEach || c == noContext {
		return false
	}
	return contains(StatementWords(Top), t.Text) && !contains(StatementWords(c), t.Text)
}

// head takes one statement from token i on, with its block.
func (p *parser) head(i, end int) (chunk, int) {
	k := chunk{lo: i, close: -1}
	first := p.tokens[i]
	depth := 0
	for i < end {
		t := p.tokens[i]
		if t.Kind == Block {
			return p.block(k, i, end)
		}
		if t.is("}") && i > k.lo {
			break
		}
		switch {
		case t.Kind == Open || t.is("(") || t.is("["):
			depth++
		case t.is(")") || t.is("]"):
			depth--
		}
		i++
		if i < end && p.tokens[i].Line != t.Line && depth > 0 && p.beginsStatement(i) {
			break
		}
		if i < end && p.tokens[i].Line != t.Line && depth <= 0 && !continues(t) {
			if p.tokens[i].Kind != Block || blockContext(first.Text) == noContext {
				break
			}
			p.report(p.tokens[i], "brace-line", "a brace opens at the end of its statement's line", "it stands on a line of its own", "")
		}
	}
	k.hi = i
	return k, i
}

// beginsStatement says whether token i, first on its line inside an open
// bracket, must begin a statement: two words side by side, the first of which
// begins statements, stand in no expression. The bracket was not closed then.
func (p *parser) beginsStatement(i int) bool {
	t := p.tokens[i]
	if t.Kind != Ident || i+1 >= len(p.tokens) || p.tokens[i+1].Line != t.Line {
		return false
	}
	switch p.tokens[i+1].Kind {
	case Ident, Text, Block:
		return contains(StatementWords(Top), t.Text) || contains(StatementWords(InLine), t.Text)
	}
	return false
}

// block takes the block that opens at token i and finishes the statement.
func (p *parser) block(k chunk, i, end int) (chunk, int) {
	k.hi, k.block = i+1, true
	k.inner = blockContext(p.tokens[k.lo].Text)
	items, next, closed := p.cut(i+1, end, k.inner, i)
	k.items = items
	if closed {
		k.close = next
		return k, next + 1
	}
	found := "the file ends before it does"
	if next < end {
		line, _ := p.tokens[next].span(p.file).Position()
		found = "`" + p.tokens[next].Text + "` begins a new statement on line " + itoa(line)
	}
	p.report(p.tokens[i], "open-brace", "this brace is not closed", found, "}")
	return k, next
}

// continues says whether a statement goes on in the next line after t.
func continues(t Token) bool {
	if t.Kind == Sign || t.Kind == Times {
		return true
	}
	if t.Kind != Mark {
		return false
	}
	switch t.Text {
	case ",", "=", "<", "<=", ">", ">=", "+-", "±", "..":
		return true
	}
	return false
}

// report adds an error at a token.
func (p *parser) report(t Token, code, summary, found, hint string) {
	p.diags.Add(diag.Diagnostic{Code: code, Span: t.span(p.file), Summary: summary, Found: found, Hint: hint})
}

func contains(words []string, w string) bool {
	for _, x := range words {
		if x == w {
			return true
		}
	}
	return false
}
