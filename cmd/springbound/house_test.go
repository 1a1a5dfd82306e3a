package main

import (
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path/filepath"
	"sort"
	"strconv"
	"strings"
	"testing"
)

// mayImport is the written list: what each package of the house may import of the house. Water flows one way.
var mayImport = map[string][]string{
	"aquifer/mesh":          {},
	"aquifer/sparse":        {},
	"aquifer":               {"aquifer/mesh", "aquifer/sparse"},
	"wells":                 {},
	"adjoint":               {"aquifer", "aquifer/mesh", "wells"}, // the mesh: errors and refinement work on its triangles
	"plan/convex":           {},
	"plan":                  {"wells", "plan/convex"},
	"plan/workbook":         {"plan"},
	"gisio":                 {"aquifer", "wells", "plan"},
	"cmd/springbound":       {"aquifer", "aquifer/mesh", "wells", "adjoint", "plan", "plan/workbook", "gisio"},
	"examples/varrow-bight": {},
}

// formatLibraries are imported where listed only. Workbooks are read in gisio (tables) and written in plan/workbook.
var formatLibraries = map[string][]string{
	"github.com/paulmach/orb/geojson": {"gisio"},
	"github.com/pelletier/go-toml":    {"gisio"},
	"github.com/xuri/excelize":        {"gisio", "plan/workbook"},
	"github.com/alecthomas/kong":      {"cmd/springbound"},
	"encoding/csv":                    {"gisio", "cmd/springbound"},
}

func moduleRoot(t *testing.T) string {
	t.Helper()
	dir, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	for {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			return dir
		}
		parent := filepath.Dir(dir)
		if parent == dir {
			t.Fatal("no go.mod above the test")
		}
		dir = parent
	}
}

func contains(list []string, s string) bool {
	for _, v := range list {
		if v == s {
			return true
		}
	}
	return false
}

func TestImportsFlowOneWay(t *testing.T) {
	root := moduleRoot(t)
	files := 0
	err := filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() && strings.HasPrefix(d.Name(), ".") && path != root {
			return filepath.SkipDir
		}
		if !strings.HasSuffix(path, ".go") || strings.HasSuffix(path, "_test.go") {
			return nil
		}
		rel, err := filepath.Rel(root, filepath.Dir(path))
		if err != nil {
			return err
		}
		pkg := filepath.ToSlash(rel)
		allowed, known := mayImport[pkg]
		if !known {
			t.Errorf("package %s is not in the written list", pkg)
		}
		f, err := parser.ParseFile(token.NewFileSet(), path, nil, parser.ImportsOnly)
		if err != nil {
			return err
		}
		files++
		for _, imp := range f.Imports {
			name, err := strconv.Unquote(imp.Path.Value)
			if err != nil {
				return err
			}
			if own, ok := strings.CutPrefix(name, "springbound/"); ok && !contains(allowed, own) {
				t.Errorf("%s imports %s, which the written list does not allow", filepath.ToSlash(path), own)
			}
			libraries := make([]string, 0, len(formatLibraries))
			for l := range formatLibraries {
				libraries = append(libraries, l)
			}
			sort.Strings(libraries)
			for _, l := range libraries {
				if strings.HasPrefix(name, l) && !contains(formatLibraries[l], pkg) {
					t.Errorf("%s imports %s, which belongs to %v alone", filepath.ToSlash(path), name, formatLibraries[l])
				}
			}
			if name == "C" {
				t.Errorf("%s needs cgo", path)
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if files < 50 {
		t.Errorf("only %d files seen; the walk is broken", files)
	}
}

// Libraries never print or exit: only the command does.
func TestLibrariesNeverPrintOrExit(t *testing.T) {
	root := moduleRoot(t)
	banned := []string{"fmt.Print", "os.Exit", "os.Stdout", "os.Stderr", "os.Args", "os.Getenv", "\tprintln("}
	err := filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() && (strings.HasPrefix(d.Name(), ".") && path != root || filepath.Base(path) == "cmd") {
			return filepath.SkipDir
		}
		if !strings.HasSuffix(path, ".go") || strings.HasSuffix(path, "_test.go") {
			return nil
		}
		data, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		for _, b := range banned {
			if i := strings.Index(string(data), b); i >= 0 {
				t.Errorf("%s uses %s", path, b)
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
}
