package syntax

import (
	"io"

	"github.com/alecthomas/participle/v2/lexer"
	"github.com/tautspan/tautspan/dsl/diag"
)

// Kind tells what a token is.
type Kind int

// The kinds of token. Marks are commas, dots, brackets and signs that are no operators.
const (
	Ident   Kind = iota + 1 // a word: keyword or name; digits behind a dot
	Numeral                 // digits, with point and exponent
	UnitTok                 // a unit behind a number or behind `unit`
	Text                    // a text with its quotes
	Open                    // `(` that touches the name or text before it
	Sign                    // + or -
	Times                   // * or / or ^
	Mark                    // any other sign of the language
	Block                   // `{`, which stands for the whole block in the grammar of a statement
	Bad                     // bytes that belong to no token; a diagnostic says why
	Remark                  // a comment with its `#`
)

// Token is one token with its place: byte offsets and the line it begins on,
// counted from 1. A token never spans lines.
type Token struct {
	Kind       Kind
	Text       string
	Start, End int
	Line       int
}

// span returns the token's place in f.
func (t Token) span(f *diag.File) diag.Span {
	return diag.Span{File: f, Start: t.Start, End: t.End}
}

// is says whether the token is that mark.
func (t Token) is(mark string) bool { return t.Kind == Mark && t.Text == mark }

// definition lets participle use the scanner.
type definition struct{}

// Symbols names the kinds of token for the grammar.
func (definition) Symbols() map[string]lexer.TokenType {
	return map[string]lexer.TokenType{
		"EOF":    lexer.EOF,
		"Word":   lexer.TokenType(Ident),
		"Number": lexer.TokenType(Numeral),
		"Unit":   lexer.TokenType(UnitTok),
		"Text":   lexer.TokenType(Text),
		"Open":   lexer.TokenType(Open),
		"Sign":   lexer.TokenType(Sign),
		"Times":  lexer.TokenType(Times),
		"Mark":   lexer.TokenType(Mark),
		"Block":  lexer.TokenType(Block),
		"Bad":    lexer.TokenType(Bad),
	}
}

// Lex scans a whole text; comments are left out.
func (d definition) Lex(name string, r io.Reader) (lexer.Lexer, error) {
	text, err := io.ReadAll(io.LimitReader(r, MaxBytes+1))
	if err != nil {
		return nil, err
	}
	tokens, _ := Scan(diag.NewFile(name, string(text)))
	return &tokenLexer{tokens: withoutRemarks(tokens)}, nil
}

// tokenLexer hands out tokens that were scanned before.
type tokenLexer struct {
	tokens []Token
	next   int
	end    lexer.Position // place of the end of the statement
}

// Next returns the next token, or EOF at the end.
func (l *tokenLexer) Next() (lexer.Token, error) {
	if l.next >= len(l.tokens) {
		return lexer.EOFToken(l.end), nil
	}
	t := l.tokens[l.next]
	l.next++
	return lexer.Token{
		Type:  lexer.TokenType(t.Kind),
		Value: t.Text,
		Pos:   lexer.Position{Offset: t.Start, Line: t.Line},
	}, nil
}

func withoutRemarks(tokens []Token) []Token {
	out := make([]Token, 0, len(tokens))
	for _, t := range tokens {
		if t.Kind != Remark {
			out = append(out, t)
		}
	}
	return out
}
