package main

import (
	"fmt"
	"os"
	"path/filepath"

	"springbound/gisio"
)

// runStart writes the starter project into a folder that holds none of its files yet.
func runStart(dir string, s streams) error {
	var files []outputFile
	for _, f := range gisio.StarterFiles() {
		files = append(files, outputFile{f.Name, f.Data})
	}
	for _, f := range files {
		if _, err := os.Stat(filepath.Join(dir, f.name)); err == nil {
			return usagef("%s is there already; choose a folder without a project", filepath.Join(dir, f.name))
		}
	}
	if err := writeOutputs(dir, files); err != nil {
		return err
	}
	for _, f := range files {
		fmt.Fprintln(s.out, filepath.Join(dir, f.name))
	}
	fmt.Fprintf(s.out, "\nNext: springbound check %s, then springbound plan %s. Replace the files one by one with your own.\n", dir, dir)
	return nil
}
