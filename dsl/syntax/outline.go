package syntax

// Outline is the token side of a tree, for tools that care about layout: the
// same statements as in Tree.Statements, as ranges of tokens.
type Outline struct {
	Tokens  []Token      // without comments
	Remarks []Token      // the comments
	Pieces  []Piece      // the statements at the top, in order
	Signs   map[int]bool // offsets of + and - that are signs, not operators
}

// Piece is one statement as a range of tokens.
type Piece struct {
	Lo, Hi int     // tokens of its head, half-open, with the `{` where there is one
	Block  bool    // it has a block
	Close  int     // token of the `}`; -1 where there is none
	Items  []Piece // the statements of the block
}

// Outline returns the token side of the tree. For a file without errors,
// Pieces and Statements correspond one to one, and so do the Items of an each
// block and its Statements.
func (t *Tree) Outline() Outline {
	return Outline{Tokens: t.tokens, Remarks: t.remarks, Pieces: pieces(t.chunks), Signs: t.signs}
}

func pieces(chunks []chunk) []Piece {
	out := make([]Piece, len(chunks))
	for i, k := range chunks {
		out[i] = Piece{Lo: k.lo, Hi: k.hi, Block: k.block, Close: k.close, Items: pieces(k.items)}
	}
	return out
}
