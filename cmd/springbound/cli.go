package main

import (
	"context"
	"errors"
	"fmt"
	"runtime/debug"
	"strings"

	"github.com/alecthomas/kong"
)

const description = `Plans how much each well of a wellfield may pump, so that the protected spring, the wetland, the river and the
neighbour's well all stay inside their limits, and shows which wells drive each of them.

A planning aid: steady and confined flow in a single layer. Its results are drafts for a licensed professional to check and sign
under local rules.

A first plan:

    springbound start my-site          writes a small commented project
    springbound check my-site          reads everything and reports every problem at once
    springbound plan  my-site          writes plan.xlsx, plan.json and maps to my-site/out

Exit codes: 0 done, 2 usage, 3 bad data, 4 no plan can meet the limits, the plan is not valid, or
a check of the audit fails, 5 numerical failure, 130 interrupted.`

// common are the flags of every command that reads a project.
type common struct {
	Project string `arg:"" help:"Project file, or the folder that holds project.toml."`
	JSON    bool   `name:"json" help:"Print the result as JSON."`
	Quiet   bool   `short:"q" help:"No progress and no warnings; errors are still printed."`
}

// solving are the flags of every command that solves.
type solving struct {
	common
	Out     string `type:"path" placeholder:"DIR" help:"Folder for the results; left out: 'out' beside the project file. All files are written or none."`
	Workers int    `placeholder:"N" help:"Processors to use; left out: all. Results are the same for any number."`
}

// planning are the flags of the main job.
type planning struct {
	solving
	Errors  bool   `help:"Estimate the mesh's error of every sensitivity, with a bound for every change, however long it takes."`
	Problem string `type:"path" placeholder:"FILE" help:"Also write the plan's programme to this file, in the free MPS format, so that another solver can be handed it."`
}

type commands struct {
	Start struct {
		Dir string `arg:"" help:"Folder to make; it must not hold a project yet."`
	} `cmd:"" help:"Write a commented starter project."`
	Check   common   `cmd:"" help:"Read everything, report every problem at once, solve nothing."`
	Drivers solving  `cmd:"" help:"Sensitivities: which wells drive each receptor."`
	Plan    planning `cmd:"" help:"The main job: the best rates inside the limits, as workbook, JSON and maps."`
	Try     struct {
		solving
		Rates string `arg:"" help:"CSV or XLSX table with the columns id and rate (with its unit), such as the rates.csv that plan leaves."`
	} `cmd:"" help:"The receptors under rates given in a table, without optimising."`
	Where   siting  `cmd:"" help:"Siting: where a further well could go, and what it is worth to the plan."`
	Audit   solving `cmd:"" help:"The evidence: water balance, reciprocity, differences, meshes, boundaries and optimum, each checked by other means; audit.json, audit.txt and audit.xlsx in 'out-audit'."`
	Curve   curving `cmd:"" help:"The best yield, or the best headroom, against the value of one limit: table, picture and JSON."`
	Version bool    `help:"Print the version."`
}

// version is that of the build: the module's, or the revision it was built from.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	if v := info.Main.Version; v != "" && v != "(devel)" {
		return strings.SplitN(v, "+", 2)[0]
	}
	return "development"
}

// run parses the arguments, runs a command and returns the exit code.
func run(ctx context.Context, args []string, s streams) int {
	var c commands
	stopped := false
	parser, err := kong.New(&c, kong.Name("springbound"), kong.Description(description), kong.Writers(s.out, s.err),
		kong.Exit(func(int) { stopped = true }), kong.ConfigureHelp(kong.HelpOptions{WrapUpperBound: 110}))
	if err != nil {
		fmt.Fprintln(s.err, "springbound:", err)
		return exitUsage
	}
	if len(args) == 0 {
		args = []string{"--help"}
	}
	if len(args) == 1 && args[0] == "--version" {
		fmt.Fprintln(s.out, "springbound", version())
		return exitDone
	}
	k, err := parser.Parse(args)
	if stopped {
		return exitDone
	}
	if err != nil {
		var parse *kong.ParseError
		if errors.As(err, &parse) {
			err = usagef("%v; 'springbound --help' shows the commands", err)
		}
		fmt.Fprintln(s.err, "springbound:", err)
		return exitUsage
	}
	switch k.Selected().Name {
	case "start":
		err = runStart(c.Start.Dir, s)
	case "check":
		err = runCheck(ctx, c.Check, s)
	case "drivers":
		err = runDrivers(ctx, c.Drivers, s)
	case "plan":
		err = runPlan(ctx, c.Plan, s)
	case "where":
		err = runWhere(ctx, c.Where, s)
	case "try":
		err = runTry(ctx, c.Try.solving, c.Try.Rates, s)
	case "audit":
		err = runAudit(ctx, c.Audit, s)
	case "curve":
		err = runCurve(ctx, c.Curve, s)
	}
	if err != nil {
		fmt.Fprintln(s.err, "springbound:", err)
		if ctx.Err() != nil {
			return exitInterrupted
		}
	}
	return exitCode(err)
}
