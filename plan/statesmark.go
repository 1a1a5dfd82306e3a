package plan

import (
	"fmt"
	"reflect"
	"regexp"
	"strconv"
	"strings"
)

// Where several operating states are planned together, every id, name and phrase that belongs to one of them carries a mark behind it, which is
// turned into words when the report is folded back: left out where the text stands in that state's own part, '(peak month)' elsewhere.

// marker finds marks: a unit separator, which no id holds, on either side of the state's index.
var marker = regexp.MustCompile("\x1f[0-9]+\x1f")

func mark(k int) string { return fmt.Sprintf("\x1f%d\x1f", k) }

// unmarked drops all marks.
func unmarked(text string) string {
	if !strings.Contains(text, "\x1f") {
		return text
	}
	return marker.ReplaceAllString(text, "")
}

// unmarkedNames drops the marks of names, and repetitions.
func unmarkedNames(names []string) []string {
	var out notes
	for _, name := range names {
		out.addf("%s", unmarked(name))
	}
	return out
}

// marksIn lists the states that a text names, in the order of their first mention.
func marksIn(text string) []int {
	var out []int
	seen := map[int]bool{}
	for _, m := range marker.FindAllString(text, -1) {
		k, _ := strconv.Atoi(strings.Trim(m, "\x1f"))
		if !seen[k] {
			seen[k] = true
			out = append(out, k)
		}
	}
	return out
}

// words turns the marks of a text into words. own is the state in whose part of the report it stands, -1: none. A text that names one
// state more than once is headed by it instead.
func (e *expansion) words(text string, own int) string {
	if !strings.Contains(text, "\x1f") {
		return text
	}
	marks := marksIn(text)
	if len(marks) == 1 && (marks[0] == own || len(marker.FindAllString(text, -1)) > 1) {
		plain := unmarked(text)
		if marks[0] == own {
			return plain
		}
		return e.parts[marks[0]].name + ": " + plain
	}
	return marker.ReplaceAllStringFunc(text, func(m string) string {
		k, _ := strconv.Atoi(strings.Trim(m, "\x1f"))
		if k == own {
			return ""
		}
		return " (" + e.parts[k].name + ")"
	})
}

// foldNotes turns the marks of notes into words. What is said alike of every state is said once, without their names.
func (e *expansion) foldNotes(list []string) []string {
	states := map[string]map[int]bool{}
	for _, text := range list {
		plain := unmarked(text)
		if states[plain] == nil {
			states[plain] = map[int]bool{}
		}
		if marks := marksIn(text); len(marks) == 1 {
			states[plain][marks[0]] = true
		}
	}
	var out notes
	for _, text := range list {
		if plain := unmarked(text); len(states[plain]) == len(e.parts) && len(marksIn(text)) == 1 {
			out.addf("%s", plain)
		} else {
			out.addf("%s", e.words(text, -1))
		}
	}
	return out
}

// reword turns the marks of every text in a value into words; v is what a pointer points to.
func (e *expansion) reword(v reflect.Value, own int) {
	switch v.Kind() {
	case reflect.String:
		if v.CanSet() {
			v.SetString(e.words(v.String(), own))
		}
	case reflect.Pointer:
		if !v.IsNil() {
			e.reword(v.Elem(), own)
		}
	case reflect.Slice:
		for i := range v.Len() {
			e.reword(v.Index(i), own)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			e.reword(v.Field(i), own)
		}
	}
}
