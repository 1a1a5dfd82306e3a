package gisio

import (
	"strings"
	"unicode/utf16"
	"unicode/utf8"
)

// string reads a text in double quotes (RFC 8259, section 7); without escapes it shares the memory of the source.
func (p *jsonParser) string() (string, bool) {
	p.pos++
	start := p.pos
	for p.pos < len(p.src) {
		switch c := p.src[p.pos]; {
		case c == '"':
			p.pos++
			return p.src[start : p.pos-1], true
		case c == '\\':
			return p.escaped(start)
		case c < 0x20:
			return "", p.syntax("an escape such as \\n for a control character in a text")
		}
		p.pos++
	}
	return "", p.syntax("a closing double quote")
}

// escaped goes on with a string in which an escape was met.
func (p *jsonParser) escaped(start int) (string, bool) {
	var b strings.Builder
	b.WriteString(p.src[start:p.pos])
	for p.pos < len(p.src) {
		c := p.src[p.pos]
		switch {
		case c == '"':
			p.pos++
			return b.String(), true
		case c < 0x20:
			return "", p.syntax("an escape such as \\n for a control character in a text")
		case c != '\\':
			b.WriteByte(c)
			p.pos++
			continue
		}
		p.pos++
		if p.pos >= len(p.src) {
			break
		}
		if p.src[p.pos] == 'u' {
			r, ok := p.unicodeEscape()
			if !ok {
				return "", false
			}
			b.WriteRune(r)
			continue
		}
		const from, to = `"\/bfnrt`, "\"\\/\b\f\n\r\t"
		i := strings.IndexByte(from, p.src[p.pos])
		if i < 0 {
			return "", p.syntax(`one of " \ / b f n r t u after a backslash`)
		}
		b.WriteByte(to[i])
		p.pos++
	}
	return "", p.syntax("a closing double quote")
}

// unicodeEscape reads uXXXX, and a second escape where the first is the leading half of a surrogate pair.
func (p *jsonParser) unicodeEscape() (rune, bool) {
	start := p.pos
	r, ok := p.hex4()
	if !ok {
		return 0, false
	}
	if !utf16.IsSurrogate(r) {
		return r, true
	}
	if strings.HasPrefix(p.src[p.pos:], `\u`) {
		p.pos++
		low, ok := p.hex4()
		if !ok {
			return 0, false
		}
		if full := utf16.DecodeRune(r, low); full != utf8.RuneError {
			return full, true
		}
	}
	return 0, p.fail(start, "half of a surrogate pair in an escape", "a whole character", "")
}

func (p *jsonParser) hex4() (rune, bool) {
	p.pos++
	if p.pos+4 > len(p.src) {
		p.pos = len(p.src)
		return 0, p.syntax("four hexadecimal digits")
	}
	var r rune
	for range 4 {
		c := p.src[p.pos]
		switch {
		case c >= '0' && c <= '9':
			r = r<<4 | rune(c-'0')
		case c >= 'a' && c <= 'f':
			r = r<<4 | rune(c-'a'+10)
		case c >= 'A' && c <= 'F':
			r = r<<4 | rune(c-'A'+10)
		default:
			return 0, p.syntax("four hexadecimal digits")
		}
		p.pos++
	}
	return r, true
}
