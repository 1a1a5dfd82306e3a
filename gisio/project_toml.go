package gisio

import (
	"errors"
	"fmt"
	"sort"
	"strings"
	"time"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// settings is the project file as a tree of tables, with the line of every key.
type settings struct {
	file  string
	root  map[string]any
	lines map[string]int // by path, parts joined with pathMark
}

// pathMark joins the parts of a path; it cannot stand in a key that anyone would write.
const pathMark = "\x00"

// parseSettings reads TOML. A text that is no TOML gives one finding, with its place.
func parseSettings(file string, data []byte) (*settings, *Finding) {
	s := &settings{file: file, root: map[string]any{}, lines: map[string]int{}}
	if err := toml.Unmarshal(data, &s.root); err != nil {
		f := &Finding{Severity: Error, File: file, Found: "a text that is no TOML: " + strings.TrimPrefix(err.Error(), "toml: ")}
		var d *toml.DecodeError
		if errors.As(err, &d) {
			f.Line, f.Column = d.Position()
		}
		return nil, f
	}
	s.findLines(data)
	return s, nil
}

// findLines walks the text a second time for the line of every key.
func (s *settings) findLines(data []byte) {
	var p unstable.Parser
	p.Reset(data)
	prefix := ""
	counts := map[string]int{}
	for p.NextExpression() {
		e := p.Expression()
		switch e.Kind {
		case unstable.Table, unstable.ArrayTable:
			path, line := keyPath(&p, e.Key())
			if e.Kind == unstable.ArrayTable {
				n := counts[path]
				counts[path] = n + 1
				s.note(path, line)
				path = fmt.Sprintf("%s%s%d", path, pathMark, n)
			}
			prefix = path
			s.note(path, line)
		case unstable.KeyValue:
			s.keyLine(&p, e, prefix)
		}
	}
}

// keyLine notes the line of a key and of the keys of inline tables below it.
func (s *settings) keyLine(p *unstable.Parser, e *unstable.Node, prefix string) {
	path, line := keyPath(p, e.Key())
	if prefix != "" {
		path = prefix + pathMark + path
	}
	s.note(path, line)
	s.valueLines(p, e.Value(), path)
}

// valueLines goes into inline tables and arrays.
func (s *settings) valueLines(p *unstable.Parser, v *unstable.Node, path string) {
	switch v.Kind {
	case unstable.InlineTable:
		for it := v.Children(); it.Next(); {
			s.keyLine(p, it.Node(), path)
		}
	case unstable.Array:
		n := 0
		for it := v.Children(); it.Next(); {
			if it.Node().Kind == unstable.Comment {
				continue
			}
			s.valueLines(p, it.Node(), fmt.Sprintf("%s%s%d", path, pathMark, n))
			n++
		}
	}
}

// note keeps the first line of a path and of the paths above it.
func (s *settings) note(path string, line int) {
	if _, ok := s.lines[path]; !ok {
		s.lines[path] = line
	}
	if i := strings.LastIndex(path, pathMark); i > 0 {
		s.note(path[:i], line)
	}
}

// keyPath joins a key's parts and gives its line.
func keyPath(p *unstable.Parser, key unstable.Iterator) (string, int) {
	var parts []string
	line := 0
	for key.Next() {
		n := key.Node()
		if line == 0 && n.Raw.Length > 0 {
			line = p.Shape(n.Raw).Start.Line
		}
		parts = append(parts, string(n.Data))
	}
	return strings.Join(parts, pathMark), line
}

// line returns the line of a path, or of the nearest path above it.
func (s *settings) line(path ...string) int {
	for n := len(path); n > 0; n-- {
		if l, ok := s.lines[strings.Join(path[:n], pathMark)]; ok {
			return l
		}
	}
	return 0
}

// keys lists a table's keys in the order of their lines, then of their names.
func (s *settings) keys(table map[string]any, path ...string) []string {
	var keys []string
	for k := range table {
		keys = append(keys, k)
	}
	sort.Slice(keys, func(i, j int) bool {
		a, b := s.line(append(path[:len(path):len(path)], keys[i])...), s.line(append(path[:len(path):len(path)], keys[j])...)
		if a != b {
			return a < b
		}
		return keys[i] < keys[j]
	})
	return keys
}

// record makes a record of one table of the file. Unknown keys are errors that name the nearest known one; skip holds keys that
// other code reads.
func (s *settings) record(rd *reader, section *Section, table map[string]any, heading string, skip []string, path ...string) *record {
	at := Finding{File: s.file, Feature: heading, Line: s.line(path...)}
	var list []written
	for _, k := range s.keys(table, path...) {
		if contains(skip, k) {
			continue
		}
		list = append(list, written{key: k, value: tomlValue(table[k]), line: s.line(append(path[:len(path):len(path)], k)...)})
	}
	rec := rd.newRecord(section, at, list)
	for _, k := range rec.unknown {
		hint := "the keys here are " + strings.Join(append(section.names(), skip...), ", ")
		if near := section.nearestKey(k); near != "" {
			hint = "did you mean " + near + "?"
		} else if near := nearest(k, skip); near != "" {
			hint = "did you mean " + near + "?"
		}
		rec.fail(Finding{Property: k, Line: s.line(append(path[:len(path):len(path)], k)...), Found: "an unknown key", Hint: hint})
	}
	rec.needAlways()
	return rec
}

// tomlValue turns dates and times into text.
func tomlValue(v any) any {
	switch d := v.(type) {
	case time.Time:
		return d.Format(time.RFC3339)
	case toml.LocalDate:
		return d.String()
	case toml.LocalDateTime:
		return d.String()
	case toml.LocalTime:
		return d.String()
	}
	return v
}

// table returns the table of that name below the root; nil where there is none, an error where it is something else.
func (s *settings) table(rd *reader, name string) map[string]any {
	v, ok := s.root[name]
	if !ok {
		return nil
	}
	t, ok := v.(map[string]any)
	if !ok {
		rd.fail(Finding{File: s.file, Line: s.line(name), Property: name, Found: valueText(tomlValue(v)), Allowed: "a table", Hint: "write [" + name + "] on a line of its own and its keys below"})
	}
	return t
}

// contains tells whether the list holds the word.
func contains(list []string, word string) bool {
	for _, w := range list {
		if w == word {
			return true
		}
	}
	return false
}
