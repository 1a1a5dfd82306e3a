package main

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
)

// outputFile is a result that is ready to be written.
type outputFile struct {
	name string // with forward slashes, below the output folder; or the whole path of a file that was named
	data []byte
}

// path is where the file goes.
func (f outputFile) path(dir string) string {
	name := filepath.FromSlash(f.name)
	if filepath.IsAbs(name) {
		return name
	}
	return filepath.Join(dir, name)
}

// writeOutputs writes all files or none: first under other names beside their places, then, when every one is on disk, each takes its
// name. A failure before that leaves the folder as it was.
func writeOutputs(dir string, files []outputFile) (err error) {
	var staged []string
	defer func() {
		if err != nil {
			for _, s := range staged {
				err = errors.Join(err, ignoreMissing(os.Remove(s)))
			}
		}
	}()
	for _, f := range files {
		path := f.path(dir)
		if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
			return fmt.Errorf("cannot make the output folder: %w", err)
		}
		temporary := path + ".part"
		staged = append(staged, temporary)
		if err := os.WriteFile(temporary, f.data, 0o644); err != nil {
			return fmt.Errorf("cannot write results: %w", err)
		}
	}
	for i, f := range files {
		if err := os.Rename(staged[i], f.path(dir)); err != nil {
			return fmt.Errorf("cannot put results in place: %w", err)
		}
	}
	return nil
}

// dropStale removes maps of an earlier run from a folder that only this program writes: those whose receptor is gone.
func dropStale(dir, folder string, files []outputFile) error {
	entries, err := os.ReadDir(filepath.Join(dir, folder))
	if err != nil {
		return ignoreMissing(err)
	}
	current := map[string]bool{}
	for _, f := range files {
		current[f.name] = true
	}
	for _, e := range entries {
		if name := folder + "/" + e.Name(); filepath.Ext(name) == ".geojson" && !current[name] {
			if err := os.Remove(filepath.Join(dir, folder, e.Name())); err != nil {
				return fmt.Errorf("cannot remove an old map: %w", err)
			}
		}
	}
	return nil
}

func ignoreMissing(err error) error {
	if errors.Is(err, os.ErrNotExist) {
		return nil
	}
	return err
}
