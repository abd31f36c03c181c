package loop

import (
	"fmt"
	"unicode"
)

// tokenKind is the sort of an expression's token.
type tokenKind int

const (
	tokEnd tokenKind = iota
	tokNumber
	tokName
	tokSign // one of + - * / ^ ( )
)

// lexeme is a word of an expression. at counts characters from the start of the text.
type lexeme struct {
	kind tokenKind
	text string
	at   int
}

// exprError is what is wrong with an expression; at counts characters from its start.
type exprError struct {
	at                         int
	message, expected, nearest string
}

func (e *exprError) Error() string { return e.message }

// maxExpression bounds the length of one expression in characters.
const maxExpression = 10000

// lex splits an expression. The last token is tokEnd.
func lex(text string) ([]lexeme, *exprError) {
	runes := []rune(text)
	if len(runes) > maxExpression {
		return nil, &exprError{0, fmt.Sprintf("the expression is %d characters long", len(runes)),
			fmt.Sprintf("at most %d", maxExpression), ""}
	}
	var out []lexeme
	for i := 0; i < len(runes); {
		c := runes[i]
		n := 1
		switch {
		case c == ' ' || c == '\t' || c == '\n':
			i++
			continue
		case c < 0x80 && isDigit(byte(c)) || c == '.':
			n = scanNumber(ascii(runes[i:]))
			if n == 0 {
				return nil, &exprError{i, "a point without digits", numberForm, ""}
			}
			out = append(out, lexeme{tokNumber, string(runes[i : i+n]), i})
		case unicode.IsLetter(c) || c == '_':
			for i+n < len(runes) && nameRune(runes[i+n]) {
				n++
			}
			out = append(out, lexeme{tokName, string(runes[i : i+n]), i})
		case c == '*' && i+1 < len(runes) && runes[i+1] == '*':
			return nil, &exprError{i, `"**" is not an operator`, "^ for a power", "^"}
		case c == '+' || c == '-' || c == '*' || c == '/' || c == '^' || c == '(' || c == ')':
			out = append(out, lexeme{tokSign, string(c), i})
		default:
			return nil, badCharacter(i, c)
		}
		i += n
	}
	return append(out, lexeme{tokEnd, "", len(runes)}), nil
}

// ascii is the longest prefix of ASCII characters, one byte each.
func ascii(r []rune) string {
	n := 0
	for n < len(r) && r[n] < 0x80 {
		n++
	}
	return string(r[:n])
}

// badCharacter names what was probably meant.
func badCharacter(at int, c rune) *exprError {
	meant := map[rune]string{'−': "-", '–': "-", '·': "*", '×': "*", '∙': "*", '÷': "/", '²': "^2", '³': "^3",
		'[': "(", ']': ")", '{': "(", '}': ")", ',': ".", 'ˆ': "^"}[c]
	e := &exprError{at, fmt.Sprintf("%s has no meaning in an expression", quote(string(c))),
		"numbers, symbols, + - * / ^, parentheses, pi, sqrt(), exp()", meant}
	if !unicode.IsGraphic(c) {
		e.message = fmt.Sprintf("character U+%04X has no meaning in an expression", c)
	}
	return e
}

func nameRune(c rune) bool { return unicode.IsLetter(c) || unicode.IsDigit(c) || c == '_' }

// isName reports whether s can be the name of a symbol.
func isName(s string) bool {
	for i, c := range []rune(s) {
		if !nameRune(c) || i == 0 && unicode.IsDigit(c) {
			return false
		}
	}
	return s != ""
}
