// Package tidy writes a scenario in its one canonical layout. It changes white
// space only and keeps every comment; what it writes, it would write again.
//
// The layout, from which every column follows:
//
//   - Statements begin at the margin, those of a block four blanks further in.
//     A block's statements and its closing brace stand on lines of their own.
//   - In a block the first words are padded to the longest of them and two
//     blanks; so are the names of supports, segments and joints. (The
//     statements of an each block are laid out like those at the margin.)
//   - Watches in neighbouring lines are aligned: their places one blank behind
//     the longest name, their quantities two blanks behind the longest place.
//   - Texts and clauses of requirements in neighbouring lines are aligned,
//     three blanks behind the longest of these requirements.
//   - Elsewhere one blank stands between words and around operators; none
//     around ^ and dots, inside brackets, before a comma, behind a sign.
//   - Line ends inside a statement stay; its further lines are indented by
//     four blanks more. Several empty lines become one; none stands at the
//     ends of a file or a block. Comments keep their line; behind a statement
//     they follow two blanks.
package tidy
