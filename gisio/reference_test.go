package gisio

import (
	"regexp"
	"strings"
	"testing"
)

func TestExamplesAreRead(t *testing.T) {
	key := regexp.MustCompile(`^"?([a-z_A-Z0-9]+)"?\s*[=:]`)
	for _, s := range sections {
		for _, f := range s.Fields {
			if f.Example == "" || f.Meaning == "" {
				t.Errorf("%s %s: no example or no meaning", s.Title, f.Name)
				continue
			}
			m := key.FindStringSubmatch(f.Example)
			if m == nil {
				continue // a table's cell
			}
			if r, ok := s.resolve(m[1]); !ok || r.field.Name != f.Name {
				t.Errorf("%s: the example %q does not stand for %s", s.Title, f.Example, f.Name)
			}
		}
	}
}

func TestCellExamplesAreRead(t *testing.T) {
	for _, s := range []*Section{&limitsSection, &licencesSection, &statesSection} {
		for _, f := range s.Fields {
			if !f.Class.numeric() || f.Kind == LimitValue {
				continue
			}
			if _, _, err := ParseQuantity(f.Example, f.Kind); err != nil {
				t.Errorf("%s %s: %v", s.Title, f.Name, err)
			}
		}
	}
}

// TestKeysDoNotCollide makes every key of every section and asks that it stands for the field that it was made from.
func TestKeysDoNotCollide(t *testing.T) {
	for _, s := range sections {
		seen := map[string]bool{}
		for _, f := range s.Fields {
			if seen[f.Name] {
				t.Errorf("%s: %s twice", s.Title, f.Name)
			}
			seen[f.Name] = true
			keys := []string{f.Name}
			if f.Class.numeric() {
				keys = append(keys, f.Name+"_basis", f.Name+"_source")
				for _, u := range Units(f.Kind) {
					keys = append(keys, f.Name+"_"+u.Word)
					if f.Class == Parameter {
						keys = append(keys, f.Name+"_low_"+u.Word, f.Name+"_high_"+u.Word)
					}
				}
			}
			if f.Class == Parameter {
				keys = append(keys, f.Name+"_low", f.Name+"_high")
			}
			if f.Class == Level {
				for _, ref := range levelReferences {
					keys = append(keys, f.Name+"_depth_below_"+ref, f.Name+"_depth_below_"+ref+"_ft")
				}
			}
			for _, k := range keys {
				r, ok := s.resolve(k)
				if !ok || r.field.Name != f.Name {
					t.Errorf("%s: %s does not stand for %s", s.Title, k, f.Name)
				}
			}
		}
	}
}

func TestReferenceListsEverything(t *testing.T) {
	page := ReferenceMarkdown()
	for _, s := range sections {
		if !strings.Contains(page, "### "+s.Title+"\n") {
			t.Errorf("no heading %q", s.Title)
		}
		for _, f := range s.Fields {
			if !strings.Contains(page, "| `"+f.Name+"` |") {
				t.Errorf("%s: no line for %s", s.Title, f.Name)
			}
		}
	}
	for k := Rate; k < LimitValue; k++ {
		for _, u := range Units(k) {
			if !strings.Contains(page, "`"+u.Name+"` (`_"+u.Word+"`)") {
				t.Errorf("%v: no unit %s", k, u.Name)
			}
		}
	}
	columns := regexp.MustCompile(`(^|[^\\])\|`)
	for i, line := range strings.Split(page, "\n") {
		if strings.HasPrefix(line, "| `") && strings.Contains(line, "` | ") {
			if n := len(columns.FindAllString(line, -1)); n != 6 && n != 3 {
				t.Errorf("line %d has %d column marks: %s", i+1, n, line)
			}
		}
	}
	if page != ReferenceMarkdown() {
		t.Error("two renderings differ")
	}
}

func TestUnitsAreUnique(t *testing.T) {
	for k := Rate; k < LimitValue; k++ {
		names, words := map[string]bool{}, map[string]bool{}
		for i, u := range Units(k) {
			if names[u.Name] || words[u.Word] {
				t.Errorf("%v: %s or %s twice", k, u.Name, u.Word)
			}
			names[u.Name], words[u.Word] = true, true
			if i == 0 && u.Factor != 1 {
				t.Errorf("%v: the first unit has the factor %v, want 1", k, u.Factor)
			}
			if !(u.Factor > 0) || u.Kind != k {
				t.Errorf("%v: %s has the factor %v and the kind %v", k, u.Name, u.Factor, u.Kind)
			}
		}
	}
}
