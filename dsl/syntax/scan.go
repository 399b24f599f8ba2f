package syntax

import (
	"fmt"
	"strings"
	"unicode"
	"unicode/utf8"

	"github.com/tautspan/tautspan/dsl/diag"
)

// Limits on what is read at all. They are chosen: a scenario of 5,000 lines
// holds some 200 kB and nests three braces and a handful of brackets.
const (
	MaxBytes  = 8 << 20 // size of a file
	MaxDepth  = 200     // brackets and braces within one another
	maxTokens = 20000   // tokens in one statement, a block's insides not counted
)

// Scan cuts a file into tokens, comments among them, in the order of the text.
// What belongs to no token becomes a Bad token and a diagnostic. A text larger
// than MaxBytes gives a diagnostic and no token.
func Scan(f *diag.File) ([]Token, diag.List) {
	if n := len(f.Text()); n > MaxBytes {
		return nil, diag.List{{
			Code:    "file-too-large",
			Span:    diag.Span{File: f},
			Summary: fmt.Sprintf("a scenario may hold %d MiB, this file holds %.1f MiB", MaxBytes>>20, float64(n)/(1<<20)),
		}}
	}
	s := &scanner{file: f, src: f.Text(), line: 1}
	s.tokens = make([]Token, 0, len(s.src)/4+8)
	s.run()
	return s.tokens, s.diags
}

// scanner holds the state of one Scan.
type scanner struct {
	file   *diag.File
	src    string
	at     int // offset of the next byte
	line   int
	depth  int
	tokens []Token
	diags  diag.List
}

// run scans to the end of the text, or to where it nests too deeply.
func (s *scanner) run() {
	s.at = len(s.src) - len(strings.TrimPrefix(s.src, "\uFEFF"))
	for s.at < len(s.src) && s.depth <= MaxDepth {
		switch c := s.src[s.at]; {
		case c == '\n':
			s.line++
			s.at++
		case c == ' ' || c == '\t' || c == '\r':
			s.at++
		case c == '#':
			s.remark()
		case c == '"':
			s.text()
		case c >= '0' && c <= '9':
			s.number()
		case c < utf8.RuneSelf && !isLetter(rune(c)):
			s.mark()
		default:
			s.word()
		}
	}
}

// emit appends a token of n bytes and steps over it.
func (s *scanner) emit(k Kind, n int) {
	s.tokens = append(s.tokens, Token{Kind: k, Text: s.src[s.at : s.at+n], Start: s.at, End: s.at + n, Line: s.line})
	s.at += n
}

// bad emits a Bad token of n bytes and says why.
func (s *scanner) bad(n int, code, summary, found, hint string) {
	span := diag.Span{File: s.file, Start: s.at, End: s.at + n}
	s.diags.Add(diag.Diagnostic{Code: code, Span: span, Summary: summary, Found: found, Hint: hint})
	s.emit(Bad, n)
}

// lineEnd returns the offset of the end of the current line.
func (s *scanner) lineEnd() int {
	if n := strings.IndexByte(s.src[s.at:], '\n'); n >= 0 {
		return s.at + n
	}
	return len(s.src)
}

// touching returns the token that ends right where the next one begins.
func (s *scanner) touching() (Token, bool) {
	if n := len(s.tokens); n > 0 && s.tokens[n-1].End == s.at {
		return s.tokens[n-1], true
	}
	return Token{}, false
}

// remark scans a comment up to the end of its line.
func (s *scanner) remark() {
	end := s.lineEnd()
	n := len(strings.TrimRight(s.src[s.at:end], " \t\r"))
	if !utf8.ValidString(s.src[s.at : s.at+n]) {
		span := diag.Span{File: s.file, Start: s.at, End: s.at + n}
		s.diags.Add(diag.Diagnostic{Code: "bad-bytes", Span: span, Summary: "this comment is not UTF-8"})
	}
	s.emit(Remark, n)
	s.at = end
}

// text scans a text in double quotes; it ends on its line and has no escapes.
func (s *scanner) text() {
	end := s.lineEnd()
	n := strings.IndexByte(s.src[s.at+1:end], '"')
	if n < 0 {
		rest := strings.TrimRight(s.src[s.at:end], " \t\r")
		s.bad(len(rest), "open-text", "this text is not closed", "no second quote on this line", rest+`"`)
		return
	}
	if !utf8.ValidString(s.src[s.at : s.at+n+2]) {
		s.bad(n+2, "bad-bytes", "this text is not UTF-8", "", "")
		return
	}
	s.emit(Text, n+2)
}

// number scans digits with point and exponent, then the unit behind them. A
// whole number behind a dot that touches a name is part of that name.
func (s *scanner) number() {
	if t, ok := s.touching(); ok && t.is(".") && len(s.tokens) > 1 {
		if p := s.tokens[len(s.tokens)-2]; p.End == t.Start && (p.Kind == Ident || p.is("]")) {
			s.emit(Ident, digits(s.src[s.at:]))
			return
		}
	}
	s.emit(Numeral, numeral(s.src[s.at:]))
	s.unit(false)
}

// digits counts the digits at the start of s.
func digits(s string) int {
	n := 0
	for n < len(s) && s[n] >= '0' && s[n] <= '9' {
		n++
	}
	return n
}

// numeral returns the length of the number at the start of s, which begins
// with a digit. The dots of `1..4` are no part of it, nor is the `e` of `3 em`.
func numeral(s string) int {
	n := digits(s)
	if n+1 < len(s) && s[n] == '.' && digits(s[n+1:]) > 0 {
		n += 1 + digits(s[n+1:])
	}
	if n < len(s) && (s[n] == 'e' || s[n] == 'E') {
		m := n + 1
		if m < len(s) && (s[m] == '+' || s[m] == '-') {
			m++
		}
		if d := digits(s[m:]); d > 0 {
			n = m + d
		}
	}
	return n
}

// unit scans a unit behind a number, or, with asked, behind the word `unit`
// (where keywords may be units, and `1` is the unit of a pure number).
func (s *scanner) unit(asked bool) {
	rest := s.src[s.at:]
	blanks := len(rest) - len(strings.TrimLeft(rest, " \t"))
	rest = rest[blanks:]
	if !asked && IsKeyword(rest[:wordLength(rest)]) {
		return
	}
	n, advice := unitShape(rest)
	if n == 0 && asked && strings.HasPrefix(rest, "1") && numeral(rest) == 1 {
		n = 1
	}
	if n == 0 {
		return
	}
	s.at += blanks
	if advice == "" {
		s.emit(UnitTok, n)
		return
	}
	span := diag.Span{File: s.file, Start: s.at, End: s.at + n}
	s.diags.Add(diag.Diagnostic{
		Code: "unit-shape", Span: span,
		Summary: "a unit has at most one `/`, with one unit or a bracket after it",
		Hint:    advice,
	})
	s.emit(UnitTok, n)
}

// word scans a name or keyword, or bytes that cannot begin one.
func (s *scanner) word() {
	rest := s.src[s.at:]
	n := wordLength(rest)
	if n > 0 {
		s.emit(Ident, n)
		if rest[:n] == "unit" {
			s.unit(true)
		}
		return
	}
	r, size := utf8.DecodeRuneInString(rest)
	if r == utf8.RuneError && size <= 1 {
		n = 1
		for n < len(rest) {
			if r, size := utf8.DecodeRuneInString(rest[n:]); r != utf8.RuneError || size != 1 {
				break
			}
			n++
		}
		s.bad(n, "bad-bytes", "these bytes are not UTF-8", fmt.Sprintf("%d of them", n), "")
		return
	}
	if r == '±' {
		s.emit(Mark, size)
		return
	}
	s.strange(r, size)
}

// strange speaks of a sign that the language does not have.
func (s *scanner) strange(r rune, size int) {
	hint := ""
	switch r {
	case '−', '–', '—':
		hint = "-"
	case '×', '·', '⋅':
		hint = "*"
	case '÷':
		hint = "/"
	case '≤':
		hint = "<="
	case '≥':
		hint = ">="
	case '“', '”', '„', '«', '»', '\'', '‘', '’':
		hint = `"`
	case '…':
		hint = ".."
	case '²':
		hint = "^2"
	case '³':
		hint = "^3"
	case '\u00a0', '\u2009', '\u202f':
		hint = "an ordinary blank"
	case ';':
		s.bad(size, "strange-sign", "a statement ends at the end of its line", "no `;` is needed, each statement has a line of its own", "")
		return
	}
	found := "not a sign of the language"
	if !unicode.IsPrint(r) {
		found = fmt.Sprintf("the invisible character U+%04X", r)
	}
	s.bad(size, "strange-sign", "this sign means nothing here", found, hint)
}

// mark scans an operator, bracket or other sign of one or two bytes.
func (s *scanner) mark() {
	rest := s.src[s.at:]
	for _, two := range []string{"+-", "<=", ">=", ".."} {
		if strings.HasPrefix(rest, two) {
			s.emit(Mark, 2)
			return
		}
	}
	c := rest[0]
	switch c {
	case '(', '[', '{':
		s.open(c)
	case ')', ']', '}':
		s.depth = max(s.depth-1, 0)
		s.emit(Mark, 1)
	case '.':
		if _, touches := s.touching(); !touches && digits(rest[1:]) > 0 {
			n := 1 + digits(rest[1:])
			s.bad(n, "bare-point", "a number begins with a digit", "", "0"+rest[:n])
			return
		}
		s.emit(Mark, 1)
	case '+', '-':
		s.emit(Sign, 1)
	case '*', '/', '^':
		s.emit(Times, 1)
	case '=', '<', '>', ',', '?':
		s.emit(Mark, 1)
	case '%':
		s.bad(1, "lone-percent", "`%` stands behind a number", "", "")
	default:
		s.strange(rune(c), 1)
	}
}

// open scans an opening bracket and watches the depth.
func (s *scanner) open(c byte) {
	s.depth++
	if s.depth > MaxDepth {
		s.bad(1, "too-deep", fmt.Sprintf("brackets may nest %d deep", MaxDepth), "the rest of the file is not read", "")
		return
	}
	kind := Mark
	if c == '{' {
		kind = Block
	}
	if t, ok := s.touching(); ok && c == '(' && (t.Kind == Ident || t.Kind == Text) {
		kind = Open
	}
	s.emit(kind, 1)
}

// isLetter says whether a name may begin with r.
func isLetter(r rune) bool { return unicode.IsLetter(r) }

// wordLength returns the length in bytes of the name at the start of s.
func wordLength(s string) int {
	for i, r := range s {
		if isLetter(r) || i > 0 && (r == '_' || r >= '0' && r <= '9') {
			continue
		}
		return i
	}
	return len(s)
}
