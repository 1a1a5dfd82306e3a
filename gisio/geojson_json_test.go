package gisio

import (
	"encoding/json"
	"strings"
	"testing"
	"unicode/utf8"
)

// plainJSON gives what the parser read as Go's own types.
func plainJSON(text *jsonText, v *jsonValue) any {
	r := layerReader{json: text}
	return r.plain(v)
}

// The parser takes exactly what the grammar allows, as far as the standard library, which is laxer in some points, can tell.
func checkAgainstStandardLibrary(t *testing.T, src string) {
	t.Helper()
	got := parseJSON(src, 10000)
	deep := strings.Count(src, "[")+strings.Count(src, "{") > maxJSONDepth
	if got.fatal == nil {
		if !json.Valid([]byte(src)) || !utf8.ValidString(src) {
			t.Fatalf("%q was taken", src)
		}
		return
	}
	if json.Valid([]byte(src)) && utf8.ValidString(src) && !deep && len(src) < 10000 && got.fatal.found != "half of a surrogate pair in an escape" {
		t.Fatalf("%q was refused: %+v", src, got.fatal)
	}
	if got.fatal.offset < 0 || got.fatal.offset > len(src) {
		t.Fatalf("%q: offset %d", src, got.fatal.offset)
	}
}

var jsonSeeds = []string{
	"", " ", "null", "true", "false", "nul", "0", "-0", "01", "-", "1.", ".5", "1e", "1e+", "1E-7", "1e999", "-1.5e-400", `""`, `"a`, `"\n"`, `"\x"`,
	`"\u00e9"`, `"\ud83d\ude00"`, `"\ud83d"`, `"\ud83dx"`, `"\ude00"`, `"\u12"`, `"\u12g4"`, "\"\x01\"", "\"\xff\"", "[]", "[,]", "[1,]", "[1,2]", "[1,\"a\"]", "[[1,2],[3]]",
	"[1 2]", "{}", `{"a":1}`, `{"a":1,}`, `{"a" 1}`, `{a:1}`, `{"a":1,"a":2}`, `{"a":{"b":[1,{"c":null}]}}`, "[1]x", "[1][2]", "\ufeff[]", "[+1]", "[NaN]", "[Infinity]",
	strings.Repeat("[", 64) + strings.Repeat("]", 64), strings.Repeat("[", 65) + strings.Repeat("]", 65), "'a'", "[1,2,[3],4]", "\t[\r\n1 , 2 ]\n", "\u00a0[]", "/**/1",
}

func TestParseJSONAgainstStandardLibrary(t *testing.T) {
	for _, s := range jsonSeeds {
		checkAgainstStandardLibrary(t, s)
	}
}

func TestParseJSONValues(t *testing.T) {
	const src = `{"a":[1,2.5e1,-0.5],"b":"\u00e9\ud83d\ude00\"\\\/\b\f\n\r\t","c":[1,"x",[2,[]]],"d":[[1,2],[3,4]],"e":{"f":null,"g":true}}`
	text := parseJSON(src, 100)
	if text.fatal != nil {
		t.Fatalf("%+v", text.fatal)
	}
	var want any
	if err := json.Unmarshal([]byte(src), &want); err != nil {
		t.Fatal(err)
	}
	got, err := json.Marshal(plainJSON(text, &text.root))
	if err != nil {
		t.Fatal(err)
	}
	again, err := json.Marshal(want)
	if err != nil {
		t.Fatal(err)
	}
	if string(got) != string(again) {
		t.Errorf("got  %s\nwant %s", got, again)
	}
}

func FuzzParseJSON(f *testing.F) {
	for _, s := range jsonSeeds {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, src string) {
		if len(src) < 4000 {
			checkAgainstStandardLibrary(t, src)
		}
	})
}
