package gisio

import (
	"fmt"
	"strings"
	"unicode"
)

// Severity tells whether a finding stops the reading or only asks for attention.
type Severity int

const (
	// Warning is a finding that the reader could live with; what it did about it is in the hint.
	Warning Severity = iota
	// Error is a finding that must be put right in the input before anything is computed.
	Error
)

// String gives "warning" or "error".
func (s Severity) String() string {
	switch s {
	case Warning:
		return "warning"
	case Error:
		return "error"
	}
	return fmt.Sprintf("severity %d", int(s))
}

// Finding is one problem in the user's input. Every text is plain; empty parts are left out of the sentence.
type Finding struct {
	Severity Severity
	File     string // name as the user gave it
	Layer    string // layer or table, such as "wells"
	Feature  string // such as `feature 3 (id "W4")`, see FeatureName; for tables `row 12`
	Property string // property, key or column
	Found    string // what is there, with its unit or in quotes where it is text
	Allowed  string // what may be there
	Hint     string // what to do about it, or what was done
	Line     int    // 1-based; 0 = not known
	Column   int    // 1-based, in characters; 0 = not known
}

// FeatureName gives the words by which findings name a feature: its place in the file, counted from 1,
// and its id where it has one. index is counted from 0, as in Feature.Index.
func FeatureName(index int, id string) string {
	if id == "" {
		return fmt.Sprintf("feature %d", index+1)
	}
	return fmt.Sprintf("feature %d (id %q)", index+1, id)
}

// String puts the finding into one sentence without a line break: file, layer, feature, property, value
// found, value allowed, what to do. Characters that a terminal would act on are written as escapes.
func (f Finding) String() string {
	var b strings.Builder
	b.WriteString(f.place())
	switch {
	case f.Property != "" && f.Found != "":
		fmt.Fprintf(&b, "%s is %s", f.Property, f.Found)
	case f.Property != "":
		fmt.Fprintf(&b, "%s is not right", f.Property)
	case f.Found != "":
		fmt.Fprintf(&b, "found %s", f.Found)
	default:
		b.WriteString("problem in the input")
	}
	if f.Allowed != "" {
		fmt.Fprintf(&b, "; allowed: %s", f.Allowed)
	}
	if f.Hint != "" {
		fmt.Fprintf(&b, "; %s", f.Hint)
	}
	return printable(b.String())
}

// place gives the leading "file, line, layer, feature: " of the sentence.
func (f Finding) place() string {
	var parts []string
	if f.File != "" {
		parts = append(parts, f.File)
	}
	switch {
	case f.Line > 0 && f.Column > 0:
		parts = append(parts, fmt.Sprintf("line %d, column %d", f.Line, f.Column))
	case f.Line > 0:
		parts = append(parts, fmt.Sprintf("line %d", f.Line))
	}
	if f.Layer != "" {
		parts = append(parts, "layer "+f.Layer)
	}
	if f.Feature != "" {
		parts = append(parts, f.Feature)
	}
	if len(parts) == 0 {
		return ""
	}
	return strings.Join(parts, ", ") + ": "
}

// printable writes control characters, line breaks, direction marks and broken UTF-8 as escapes.
func printable(s string) string {
	clean := true
	for _, r := range s {
		if !unicode.IsPrint(r) || r == unicode.ReplacementChar {
			clean = false
			break
		}
	}
	if clean {
		return s
	}
	var b strings.Builder
	for _, r := range s {
		switch {
		case unicode.IsPrint(r):
			b.WriteRune(r)
		case r > 0xffff:
			fmt.Fprintf(&b, "\\U%08x", r)
		default:
			fmt.Fprintf(&b, "\\u%04x", r)
		}
	}
	return b.String()
}

// Findings is a list of findings in the order in which they were met.
type Findings []Finding

// Errors gives the findings of severity Error, in their order.
func (fs Findings) Errors() Findings { return fs.only(Error) }

// Warnings gives the findings of severity Warning, in their order.
func (fs Findings) Warnings() Findings { return fs.only(Warning) }

func (fs Findings) only(s Severity) Findings {
	var out Findings
	for _, f := range fs {
		if f.Severity == s {
			out = append(out, f)
		}
	}
	return out
}

// Err gives nil when no finding is an error, and otherwise an *InputError that holds all the errors.
func (fs Findings) Err() error {
	errs := fs.Errors()
	if len(errs) == 0 {
		return nil
	}
	return &InputError{Findings: errs}
}

// MaxShownFindings is how many findings InputError.Error writes out; the rest is counted. Fifty lines fill a
// screen, and nobody mends more than that in one go.
const MaxShownFindings = 50

// InputError says that the user's input cannot be used. Findings holds every error, not only the shown ones.
type InputError struct {
	Findings Findings
}

// Error lists up to MaxShownFindings errors, one a line, and counts the rest.
func (e *InputError) Error() string {
	n := len(e.Findings)
	if n == 1 {
		return e.Findings[0].String()
	}
	var b strings.Builder
	fmt.Fprintf(&b, "%d errors in the input", n)
	for i, f := range e.Findings {
		if i == MaxShownFindings {
			fmt.Fprintf(&b, "\n  and %d more", n-i)
			break
		}
		b.WriteString("\n  ")
		b.WriteString(f.String())
	}
	return b.String()
}
