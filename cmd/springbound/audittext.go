package main

import (
	"bytes"
	"fmt"
	"io"
	"strconv"
	"strings"
	"text/tabwriter"
	"unicode/utf8"

	"springbound/plan"
)

// textWidth is where lines of audit.txt are broken.
const textWidth = 110

// figureText writes a figure with three digits.
func figureText(v *float64) string {
	if v == nil {
		return "-"
	}
	return strconv.FormatFloat(*v, 'g', 3, 64)
}

// printEvidence is the short result on standard output: a line a check.
func printEvidence(w io.Writer, e *plan.Evidence, dir string) {
	fmt.Fprintf(w, "%s\n%s\n%s\n\n", e.Title, e.Plan, e.Headline)
	checkTable(w, e)
	for _, l := range e.Lines {
		if l.Result == plan.Fail {
			fmt.Fprintf(w, "\nfail: %s. %s\n  what to do: %s\n", l.Check, l.Sentence, l.Remedy)
		}
	}
	fmt.Fprintf(w, "\nwritten to %s: audit.xlsx, audit.txt, audit.json\n%s\n", dir, planningAid)
}

func checkTable(w io.Writer, e *plan.Evidence) {
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "no.\tresult\tfound\tallowed\tcheck\tin words")
	for _, l := range e.Lines {
		fmt.Fprintf(t, "%d\t%s\t%s\t%s\t%s\t%s\n", l.Number, l.Result, figureText(l.Figure), figureText(l.Allowed), l.Check, l.Sentence)
	}
	t.Flush()
}

// evidenceText is audit.txt: every line in full, then the tables.
func evidenceText(e *plan.Evidence) []byte {
	var b bytes.Buffer
	head := strings.TrimSpace(strings.Join([]string{e.Title, e.Reference}, "  "))
	fmt.Fprintf(&b, "The evidence\n%s\n%s\n\n%s\n%s\n", head, e.Program, e.Plan, e.Headline)
	for _, l := range e.Lines {
		fmt.Fprintf(&b, "\n%-4d%s: %s\n", l.Number, strings.ToUpper(l.Result), l.Check)
		for _, p := range [][2]string{{"how", l.How}, {"found", foundText(l)}, {"allowed", allowedText(l)}, {"in words", l.Sentence}, {"if it fails", l.Remedy}} {
			if p[1] != "" {
				folded(&b, p[0], p[1])
			}
		}
	}
	textBalances(&b, e)
	textDifferences(&b, e)
	textConvergence(&b, e)
	textBoundaries(&b, e)
	section := func(title string) {
		fmt.Fprintf(&b, "\n%s\n%s\n", title, strings.Repeat("-", utf8.RuneCountInString(title)))
	}
	section("Settings")
	for _, s := range e.Settings {
		folded(&b, s.Name, s.Value)
	}
	section("Files, SHA-256")
	for _, f := range e.Inputs {
		fmt.Fprintf(&b, "    %s  %s\n", f.SHA256, f.File)
	}
	fmt.Fprintf(&b, "\n%s\nReviewed by: ____________________   Date: ____________________   Signature: ____________________\n", planningAid)
	return b.Bytes()
}

func foundText(l plan.EvidenceLine) string {
	if l.Figure == nil {
		return ""
	}
	return figureText(l.Figure) + " " + l.Unit
}

func allowedText(l plan.EvidenceLine) string {
	if l.Allowed == nil {
		return l.Reason
	}
	return figureText(l.Allowed) + ": " + l.Reason
}

// folded writes a name and its text, broken at words and indented.
func folded(b *bytes.Buffer, name, text string) {
	line := fmt.Sprintf("    %-12s", name)
	indent := strings.Repeat(" ", 16)
	if utf8.RuneCountInString(line) > 16 {
		line += " "
	}
	start := utf8.RuneCountInString(line)
	for _, word := range strings.Fields(text) {
		if n := utf8.RuneCountInString(line); n > start && n+1+utf8.RuneCountInString(word) > textWidth {
			b.WriteString(line + "\n")
			line = indent
			start = len(indent)
		} else if n > start {
			line += " "
		}
		line += word
	}
	b.WriteString(line + "\n")
}

func textTable(b *bytes.Buffer, title string, fill func(t *tabwriter.Writer)) {
	fmt.Fprintf(b, "\n%s\n%s\n", title, strings.Repeat("-", utf8.RuneCountInString(title)))
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', 0)
	fill(t)
	t.Flush()
}

func textBalances(b *bytes.Buffer, e *plan.Evidence) {
	for _, s := range e.Balances {
		textTable(b, "Water balance "+s.State+", m³/d, recomputed and as the model books it", func(t *tabwriter.Writer) {
			fmt.Fprintln(t, "kind\tfeature\tin\tout\tmodel in\tmodel out")
			for _, l := range s.Lines {
				fmt.Fprintf(t, "%s\t%s\t%.3f\t%.3f\t%.3f\t%.3f\n", l.Kind, l.Feature, l.In, l.Out, l.ModelIn, l.ModelOut)
			}
			fmt.Fprintf(t, "all\t\t%.3f\t%.3f\t\t\n", s.In, s.Out)
		})
		fmt.Fprintf(b, "largest residual of a node %.2e m³/d, at %s\n", s.Worst, s.WorstPlace)
	}
}

func textDifferences(b *bytes.Buffer, e *plan.Evidence) {
	textTable(b, "Adjoint sensitivities beside differences, unit per m³/d", func(t *tabwriter.Writer) {
		fmt.Fprintln(t, "receptor\twell\tunit\tadjoint\tdifference\tstep, m³/d\terror\tallowed\t")
		for _, d := range e.Differences {
			difference := d.Note
			if d.Difference != nil {
				difference = strconv.FormatFloat(*d.Difference, 'e', 8, 64)
			}
			fmt.Fprintf(t, "%s\t%s\t%s\t%.8e\t%s\t%.4g\t%s\t%.0e\n", d.Receptor, d.Well, d.Unit, d.Adjoint, difference, d.Step, figureText(d.Error), d.Allowed)
		}
	})
}

func textConvergence(b *bytes.Buffer, e *plan.Evidence) {
	textTable(b, "Three meshes", func(t *tabwriter.Writer) {
		fmt.Fprintln(t, "nodes\thow\tof the plan")
		for _, m := range e.Meshes {
			of := ""
			if m.OfPlan {
				of = "yes"
			}
			fmt.Fprintf(t, "%d\t%s\t%s\n", m.Nodes, m.How, of)
		}
	})
	textTable(b, "Figures at the plan's rates on the three meshes, coarsest first", func(t *tabwriter.Writer) {
		fmt.Fprintln(t, "what\tunit\tcoarse\tmiddle\tfine\torder\tRichardson\tindex of the plan's mesh, %\tbehaviour")
		for _, c := range e.Convergence {
			values := make([]string, 3)
			for k, v := range c.Values {
				values[k] = strconv.FormatFloat(v, 'g', 7, 64)
			}
			richardson := "-"
			if c.Richardson != nil {
				richardson = strconv.FormatFloat(*c.Richardson, 'g', 7, 64)
			}
			fmt.Fprintf(t, "%s %s\t%s\t%s\t%s\t%s\t%s\t%s\n", c.What, c.ID, c.Unit, strings.Join(values, "\t"), figureText(c.Order), richardson, figureText(c.Index), c.Behaviour)
		}
	})
}

func textBoundaries(b *bytes.Buffer, e *plan.Evidence) {
	textTable(b, "Where the pumped water comes from", func(t *tabwriter.Writer) {
		fmt.Fprintln(t, "kind\tfeature\tm³/d\tshare")
		for _, c := range e.Capture {
			share := "-"
			if c.Share != nil {
				share = fmt.Sprintf("%.1f %%", 100**c.Share)
			}
			fmt.Fprintf(t, "%s\t%s\t%.1f\t%s\n", c.Kind, c.Feature, c.Flow, share)
		}
	})
	for _, s := range e.Boundaries {
		textTable(b, fmt.Sprintf("Without %s %s, the plan's rates", s.Kind, s.Feature), func(t *tabwriter.Writer) {
			fmt.Fprintln(t, "receptor\tunit\tchange\tchange without\tfactor\tlimited\tlimits passed")
			for _, r := range s.Receptors {
				limited := ""
				if r.Limited {
					limited = "yes"
				}
				fmt.Fprintf(t, "%s\t%s\t%.5g\t%.5g\t%s\t%s\t%s\n", r.Receptor, r.Unit, r.With, r.Without, figureText(r.Factor), limited, strings.Join(r.Passed, ", "))
			}
		})
		fmt.Fprintln(b, s.Outcome)
	}
	if len(e.Inward) == 0 {
		return
	}
	textTable(b, "Where water comes in through a prescribed head", func(t *tabwriter.Writer) {
		fmt.Fprintln(t, "edge\tstate\tsaline\twhole edge without pumping, m³/d\tm³/d at the plan\tlength, m\tmost near")
		for _, s := range e.Inward {
			salt := "no"
			if s.Saline {
				salt = "yes"
			}
			fmt.Fprintf(t, "%s\t%s\t%s\t%.1f\t%.1f\t%.0f\t%s\n", s.Edge, s.State, salt, s.NoPumping, s.AtPlan, s.Length, s.Place)
		}
	})
}
