package main

import (
	"bytes"
	"errors"
	"os"
	"path/filepath"

	"springbound/plan"
)

// checkProblemPath refuses a place where the problem file cannot go, before anything is computed.
func (c planning) checkProblemPath() error {
	if c.Problem == "" {
		return nil
	}
	switch info, err := os.Stat(c.Problem); {
	case err == nil && info.IsDir():
		return usagef("--problem %s is a folder; name a file", c.Problem)
	case err == nil && !info.Mode().IsRegular():
		return usagef("--problem %s is not a file that can be replaced", c.Problem)
	case err != nil && !errors.Is(err, os.ErrNotExist):
		return usagef("--problem: %v", err)
	}
	folder := filepath.Dir(c.Problem)
	if info, err := os.Stat(folder); c.Out == "" || !sameFile(folder, c.Out) {
		if err != nil {
			return usagef("--problem %s: there is no folder %s", c.Problem, folder)
		}
		if !info.IsDir() {
			return usagef("--problem %s: %s is a file, not a folder", c.Problem, folder)
		}
	}
	return nil
}

// checkProblemPlace refuses to write over the project's own files and over the other results.
func (c planning) checkProblemPlace(j *job) error {
	if c.Problem == "" {
		return nil
	}
	for _, f := range j.project.Inputs {
		if sameFile(c.Problem, filepath.Join(j.project.Dir, filepath.FromSlash(f.File))) {
			return usagef("--problem %s would replace %s, which the project is read from", c.Problem, f.File)
		}
	}
	dir := c.outDir(j)
	if ext := filepath.Ext(c.Problem); sameFile(filepath.Dir(c.Problem), dir) && (ext == ".xlsx" || ext == ".json" || ext == ".csv" || ext == ".geojson") {
		return usagef("--problem %s could replace another result; choose a name that ends in .mps", c.Problem)
	}
	return nil
}

// sameFile tells whether two paths lead to one file, also through links.
func sameFile(a, b string) bool {
	x, err := os.Stat(a)
	y, err2 := os.Stat(b)
	if err == nil && err2 == nil {
		return os.SameFile(x, y)
	}
	p, err := filepath.Abs(a)
	q, err2 := filepath.Abs(b)
	return err == nil && err2 == nil && p == q
}

// problemText writes the problem file to memory.
func problemText(f *plan.ProblemFile) ([]byte, error) {
	var b bytes.Buffer
	err := f.Write(&b)
	return b.Bytes(), err
}
