package syntax

import (
	"errors"
	"strconv"
	"strings"

	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
	"github.com/tautspan/tautspan/dsl/diag"
)

// The version of the language that this package reads: tautspan Major.Minor.
const (
	Major = 1
	Minor = 0
)

// Parse reads a file. It returns the tree of everything that could be read
// and the diagnostics in order of place, at most one error a line. The tree is
// never nil, whatever the text; a statement that could not be read is a
// *Broken in it, and a block with such a statement is marked Incomplete.
//
// A statement is parsed on its own, so a mistake spoils its own statement
// only. The time taken is linear in the length of the text.
func Parse(f *diag.File) (tree *Tree, list diag.List) {
	tree = &Tree{File: f}
	p := &parser{file: f, signs: map[int]bool{}}
	defer func() {
		// The last resort: no text is known that gets here. What was read
		// before is kept, and the file is refused.
		if r := recover(); r != nil {
			p.diags.Add(diag.Diagnostic{Code: "unreadable", Span: diag.Span{File: f},
				Summary: "this file defeats the reader, please report it with the file"})
			list = finish(p.diags)
		}
	}()
	all, diags := Scan(f)
	p.diags = diags
	for _, t := range all {
		if t.Kind == Remark {
			tree.Comments = append(tree.Comments, Comment{At{t.span(f)}, t.Text})
			tree.remarks = append(tree.remarks, t)
		}
	}
	p.tokens = withoutRemarks(all)
	p.unclosed = openBraces(p.tokens) > 0
	chunks, _, _ := p.cut(0, len(p.tokens), Top, -1)
	tree.tokens, tree.chunks, tree.signs = p.tokens, chunks, p.signs
	for _, k := range chunks {
		for _, part := range p.split(k, Top) {
			tree.Statements = append(tree.Statements, p.orBroken(part, Top))
		}
	}
	if len(diags) == 0 || diags[0].Code != "file-too-large" {
		p.version(tree)
	}
	return tree, finish(p.diags)
}

// finish puts diagnostics in order and keeps one error a line.
func finish(l diag.List) diag.List {
	l.Sort()
	return l.OnePerLine()
}

// openBraces counts the braces that open and never close.
func openBraces(tokens []Token) int {
	depth := 0
	for _, t := range tokens {
		switch {
		case t.Kind == Block:
			depth++
		case t.is("}") && depth > 0:
			depth--
		}
	}
	return depth
}

// parser holds the state of one Parse.
type parser struct {
	file     *diag.File
	tokens   []Token // without comments
	diags    diag.List
	unclosed bool         // more braces open than close
	broken   int          // statements that could not be read so far
	signs    map[int]bool // offsets of + and - that are signs
}

// version checks that the file says first which language it is in.
func (p *parser) version(tree *Tree) {
	if len(tree.Statements) == 0 {
		if len(p.diags) == 0 {
			p.diags.Add(diag.Diagnostic{Code: "missing-version", Span: diag.Span{File: p.file},
				Summary: "a scenario begins with the version of its language", Found: "this file holds no statement", Hint: "tautspan 1"})
		}
		return
	}
	first := tree.Statements[0]
	if b, ok := first.(*Broken); ok && (b.Word.Text == "tautspan" || diag.Nearest(b.Word.Text, []string{"tautspan"}) != "") {
		return
	}
	v, ok := first.(*Version)
	if !ok {
		span := first.Place()
		p.diags.Add(diag.Diagnostic{Code: "missing-version", Span: firstLine(span),
			Summary: "a scenario begins with the version of its language", Found: "this comes before it", Hint: "tautspan 1"})
	} else if major, minor, ok := versionParts(v.Number.Text); !ok || major != Major || minor > Minor {
		found := "this program reads version " + itoa(Major) + "." + itoa(Minor)
		p.diags.Add(diag.Diagnostic{Code: "unknown-version", Span: v.Number.Span,
			Summary: "this version of the language is not known", Found: found, Hint: "tautspan " + itoa(Major)})
	}
	for _, s := range tree.Statements[1:] {
		if v, ok := s.(*Version); ok {
			p.reportAt(v.At, "said-twice", "the version stands once, as the first statement", "", "")
		}
	}
}

// versionParts reads "1" or "1.3".
func versionParts(s string) (major, minor int, ok bool) {
	a, b, dotted := strings.Cut(s, ".")
	major, err := strconv.Atoi(a)
	if err != nil {
		return 0, 0, false
	}
	if dotted {
		if minor, err = strconv.Atoi(b); err != nil {
			return 0, 0, false
		}
	}
	return major, minor, true
}

// firstLine cuts a span down to what it covers of its first line.
func firstLine(s diag.Span) diag.Span {
	line, _ := s.Position()
	s.End = min(s.End, s.File.LineSpan(line).End)
	return s
}

// each hands the statements of a block to f, those whose first word fits.
func (p *parser) each(k chunk, f func(chunk)) {
	if k.inner == noContext {
		return
	}
	for _, item := range k.items {
		for _, part := range p.split(item, k.inner) {
			if k.inner == InEach || p.known(part, k.inner) {
				f(part)
			}
		}
	}
}

// orBroken makes a statement's tree, or a Broken in its place.
func (p *parser) orBroken(k chunk, c Context) Statement {
	if p.known(k, c) {
		if s := p.statement(k, c); s != nil {
			return s
		}
	}
	b := &Broken{At: p.whole(k)}
	if t := p.tokens[k.lo]; t.Kind == Ident {
		b.Word = Word{At{t.span(p.file)}, t.Text}
		if k.lo+1 < k.hi && p.tokens[k.lo+1].Kind == Ident {
			b.Name = p.tokens[k.lo+1].Text
		}
	}
	return b
}

// whole returns the place of a statement with its block.
func (p *parser) whole(k chunk) At {
	last := p.tokens[max(k.hi-1, k.lo)]
	switch {
	case k.close >= 0:
		last = p.tokens[k.close]
	case len(k.items) > 0:
		return At{p.tokens[k.lo].span(p.file).To(p.whole(k.items[len(k.items)-1]).Span)}
	}
	return At{p.tokens[k.lo].span(p.file).To(last.span(p.file))}
}

// parseRule applies the grammar of one production to the head of a statement.
// On failure it reports why and returns false.
func parseRule[R any](p *parser, k chunk, c Context) (*R, bool) {
	head := p.tokens[k.lo:k.hi]
	if len(head) > maxTokens {
		p.report(head[0], "too-long", "this statement is too long", itoa(len(head))+" words and signs, "+itoa(maxTokens)+" are allowed", "")
		p.broken++
		return nil, false
	}
	for _, t := range head {
		if t.Kind == Bad { // reported by the scanner
			p.broken++
			return nil, false
		}
	}
	r, err := apply[R](head)
	if err != nil {
		p.broken++
		if !k.quiet {
			p.explain(k, c, err)
		}
		return nil, false
	}
	return r, true
}

// apply runs participle on tokens.
func apply[R any](tokens []Token) (*R, error) {
	rule, err := participle.ParserForProduction[R](rootParser())
	if err != nil {
		return nil, err
	}
	lex := &tokenLexer{tokens: tokens}
	if n := len(tokens); n > 0 {
		lex.end = lexer.Position{Offset: tokens[n-1].End, Line: tokens[n-1].Line}
	}
	peeking, err := lexer.Upgrade(lex)
	if err != nil {
		return nil, err
	}
	return rule.ParseFromLexer(peeking)
}

// failurePlace returns the index in the statement's tokens at which the
// grammar gave up (the number of tokens for its end), and what it wanted.
func failurePlace(tokens []Token, err error) (int, string) {
	var place participle.Error
	if !errors.As(err, &place) {
		return len(tokens), ""
	}
	i := 0
	for i < len(tokens) && tokens[i].Start < place.Position().Offset {
		i++
	}
	return i, err.Error()
}

func itoa(n int) string { return strconv.Itoa(n) }
