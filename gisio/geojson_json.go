package gisio

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"unicode/utf8"
)

// Limits of the JSON reader. They bound memory and stack before anything is built.
const (
	// maxJSONDepth is well above what a layer needs: a feature in a collection reaches 8, its properties a few more.
	maxJSONDepth = 64
	// maxJSONValues bounds the values held at once; a position counts as one. Two million take about 200 MB.
	maxJSONValues = 2_000_000
)

type jsonKind uint8

const (
	jsonNull jsonKind = iota
	jsonFalse
	jsonTrue
	jsonNumber
	jsonString
	jsonNumbers // array of at least one element, all of them numbers
	jsonArray
	jsonObject
)

// jsonValue is one value of a parsed text with its place.
type jsonValue struct {
	kind   jsonKind
	offset int32       // of the first byte
	end    int32       // behind the last byte
	name   string      // name, where the value is a member of an object
	text   string      // contents of a string; the digits of a number as written
	number float64     // of a number; for jsonNumbers the place of the first one in jsonText.numbers
	items  []jsonValue // elements of an array, members of an object in the order of the text
	count  int32       // elements of jsonNumbers
}

// member gives the member of an object with exactly this name, or nil.
func (v *jsonValue) member(name string) *jsonValue {
	if v == nil || v.kind != jsonObject {
		return nil
	}
	for i := range v.items {
		if v.items[i].name == name {
			return &v.items[i]
		}
	}
	return nil
}

// describe names a value in words for a finding.
func (v *jsonValue) describe() string {
	switch v.kind {
	case jsonNull:
		return "null"
	case jsonFalse:
		return "false"
	case jsonTrue:
		return "true"
	case jsonNumber:
		return "the number " + shorten(v.text)
	case jsonString:
		return "the text " + strconv.Quote(shorten(v.text))
	case jsonObject:
		return "an object"
	case jsonNumbers:
		return "an array of numbers"
	}
	if len(v.items) == 0 {
		return "an empty array"
	}
	return "an array"
}

// shorten cuts user text for a message.
func shorten(s string) string {
	const longest = 60
	if utf8.RuneCountInString(s) <= longest {
		return s
	}
	r := []rune(s[:min(len(s), longest*utf8.UTFMax)])
	return string(r[:longest]) + "..."
}

// jsonProblem is a fault at a place of the text.
type jsonProblem struct {
	offset               int
	found, allowed, hint string
}

// jsonText is a parsed text.
type jsonText struct {
	root     jsonValue
	numbers  []float64     // elements of all jsonNumbers
	problems []jsonProblem // faults that did not stop the parser: repeated names, numbers out of range
	fatal    *jsonProblem  // the fault that did
}

// jsonParser reads one JSON text (RFC 8259) strictly: UTF-8 only, no repeated names, one value and nothing after it.
type jsonParser struct {
	src    string
	pos    int
	depth  int
	values int // so far
	most   int // values allowed
	out    *jsonText
}

// parseJSON reads src, which must be shorter than 2 GiB, up to so many values; a position counts as one.
func parseJSON(src string, most int) *jsonText {
	p := jsonParser{src: src, most: most, out: &jsonText{}}
	if bad := firstBadUTF8(src); bad >= 0 {
		p.fail(bad, "bytes that are not UTF-8", "text in UTF-8", "save the file in the encoding UTF-8")
		return p.out
	}
	p.space()
	if p.pos == len(src) {
		p.fail(p.pos, "no JSON value: the file is empty", "one GeoJSON object", "")
		return p.out
	}
	root, ok := p.value()
	if !ok {
		return p.out
	}
	p.out.root = root
	p.space()
	if p.pos < len(src) {
		found, hint := "text after the end of the JSON value", "remove what follows it"
		if src[p.pos] == '{' {
			found = "a second JSON value after the first"
			hint = "put the features of both into one FeatureCollection"
		}
		p.fail(p.pos, found, "one JSON value and nothing after it", hint)
	}
	return p.out
}

func firstBadUTF8(s string) int {
	if utf8.ValidString(s) {
		return -1
	}
	for i := 0; i < len(s); {
		r, n := utf8.DecodeRuneInString(s[i:])
		if r == utf8.RuneError && n <= 1 {
			return i
		}
		i += n
	}
	return -1
}

// fail records the first fatal fault; it always gives false.
func (p *jsonParser) fail(offset int, found, allowed, hint string) bool {
	if p.out.fatal == nil {
		p.out.fatal = &jsonProblem{offset, found, allowed, hint}
	}
	return false
}

func (p *jsonParser) note(offset int, found, allowed, hint string) {
	const enough = 100 // more of the same kind help nobody
	if len(p.out.problems) < enough {
		p.out.problems = append(p.out.problems, jsonProblem{offset, found, allowed, hint})
	}
}

func (p *jsonParser) space() {
	for p.pos < len(p.src) {
		switch p.src[p.pos] {
		case ' ', '\t', '\n', '\r':
			p.pos++
		default:
			return
		}
	}
}

// syntax reports what stands at the present place where something else was due.
func (p *jsonParser) syntax(allowed string) bool {
	if p.pos >= len(p.src) {
		return p.fail(p.pos, "JSON syntax error: the text ends too early", allowed, "the file may be cut short")
	}
	r, _ := utf8.DecodeRuneInString(p.src[p.pos:])
	return p.fail(p.pos, fmt.Sprintf("JSON syntax error at the character %q", r), allowed, "")
}

func (p *jsonParser) value() (jsonValue, bool) {
	v := jsonValue{offset: int32(p.pos)}
	p.values++
	if p.values > p.most {
		return v, p.fail(p.pos, fmt.Sprintf("more than %d values and positions", p.most), "fewer", "split or simplify the layer")
	}
	if p.pos >= len(p.src) {
		return v, p.syntax("a JSON value")
	}
	ok := true
	switch c := p.src[p.pos]; {
	case c == '{' || c == '[':
		p.depth++
		if p.depth > maxJSONDepth {
			return v, p.fail(p.pos, fmt.Sprintf("arrays or objects nested more than %d deep", maxJSONDepth),
				"the depth of the geometry type, such as 3 arrays for a Polygon", "")
		}
		if c == '{' {
			ok = p.object(&v)
		} else {
			ok = p.array(&v)
		}
		p.depth--
	case c == '"':
		v.kind = jsonString
		v.text, ok = p.string()
	case c == '-' || c >= '0' && c <= '9':
		v.kind = jsonNumber
		v.text, v.number, ok = p.number()
	case c == 'n':
		v.kind, ok = jsonNull, p.word("null")
	case c == 't':
		v.kind, ok = jsonTrue, p.word("true")
	case c == 'f':
		v.kind, ok = jsonFalse, p.word("false")
	default:
		ok = p.syntax("a JSON value")
	}
	v.end = int32(p.pos)
	return v, ok
}

func (p *jsonParser) word(w string) bool {
	if !strings.HasPrefix(p.src[p.pos:], w) {
		return p.syntax("a JSON value")
	}
	p.pos += len(w)
	return true
}

func (p *jsonParser) object(v *jsonValue) bool {
	v.kind = jsonObject
	p.pos++
	var seen map[string]bool
	for first := true; ; first = false {
		p.space()
		if first && p.at('}') {
			p.pos++
			return true
		}
		if !p.at('"') {
			return p.syntax("a member name in double quotes")
		}
		nameOffset := p.pos
		name, ok := p.string()
		if !ok {
			return false
		}
		if seen == nil {
			seen = make(map[string]bool)
		}
		if seen[name] {
			p.note(nameOffset, fmt.Sprintf("the member name %q a second time in the same object", shorten(name)), "each name once",
				"remove one of the two: which of them counts cannot be known")
		}
		seen[name] = true
		p.space()
		if !p.at(':') {
			return p.syntax("a colon after the member name")
		}
		p.pos++
		p.space()
		item, ok := p.value()
		if !ok {
			return false
		}
		item.name = name
		v.items = append(v.items, item)
		p.space()
		switch {
		case p.at(','):
			p.pos++
		case p.at('}'):
			p.pos++
			return true
		default:
			return p.syntax("a comma or a closing brace")
		}
	}
}

func (p *jsonParser) at(c byte) bool { return p.pos < len(p.src) && p.src[p.pos] == c }

// array reads an array. As long as its elements are numbers they go to the common store, which keeps positions small.
func (p *jsonParser) array(v *jsonValue) bool {
	v.kind = jsonArray
	start := p.pos
	p.pos++
	p.space()
	if p.at(']') {
		p.pos++
		return true
	}
	from := len(p.out.numbers)
	for {
		p.space()
		if len(v.items) == 0 && p.pos < len(p.src) && (p.src[p.pos] == '-' || p.src[p.pos] >= '0' && p.src[p.pos] <= '9') {
			_, x, ok := p.number()
			if !ok {
				return false
			}
			p.out.numbers = append(p.out.numbers, x)
		} else {
			if count := len(p.out.numbers) - from; count > 0 && len(v.items) == 0 {
				for _, x := range p.out.numbers[from:] {
					v.items = append(v.items, jsonValue{kind: jsonNumber, offset: int32(start), end: int32(p.pos), number: x,
						text: strconv.FormatFloat(x, 'g', -1, 64)})
				}
				p.values += count
				p.out.numbers = p.out.numbers[:from]
			}
			item, ok := p.value()
			if !ok {
				return false
			}
			v.items = append(v.items, item)
		}
		p.space()
		switch {
		case p.at(','):
			p.pos++
		case p.at(']'):
			p.pos++
			if count := len(p.out.numbers) - from; count > 0 && len(v.items) == 0 {
				v.kind, v.number, v.count = jsonNumbers, float64(from), int32(count)
			}
			return true
		default:
			return p.syntax("a comma or a closing bracket")
		}
	}
}

// elements gives the numbers of a jsonNumbers value.
func (t *jsonText) elements(v *jsonValue) []float64 {
	from := int(v.number)
	return t.numbers[from : from+int(v.count)]
}

// number reads by the grammar of RFC 8259, section 6. A number beyond float64 is noted and comes back as infinite.
func (p *jsonParser) number() (string, float64, bool) {
	start := p.pos
	if p.at('-') {
		p.pos++
	}
	switch {
	case p.at('0'):
		p.pos++
		if p.pos < len(p.src) && p.src[p.pos] >= '0' && p.src[p.pos] <= '9' {
			return "", 0, p.syntax("a number without leading zeros")
		}
	case p.digits():
	default:
		return "", 0, p.syntax("a digit")
	}
	if p.at('.') {
		p.pos++
		if !p.digits() {
			return "", 0, p.syntax("a digit after the decimal point")
		}
	}
	if p.at('e') || p.at('E') {
		p.pos++
		if p.at('+') || p.at('-') {
			p.pos++
		}
		if !p.digits() {
			return "", 0, p.syntax("a digit in the exponent")
		}
	}
	text := p.src[start:p.pos]
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		p.note(start, "the number "+shorten(text)+", which is out of range", fmt.Sprintf("numbers up to %v", math.MaxFloat64), "")
	}
	return text, x, true
}

func (p *jsonParser) digits() bool {
	start := p.pos
	for p.pos < len(p.src) && p.src[p.pos] >= '0' && p.src[p.pos] <= '9' {
		p.pos++
	}
	return p.pos > start
}
