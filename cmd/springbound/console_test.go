package main

import (
	"bytes"
	"context"
	"strings"
	"testing"
)

// The console says which wells stand still, how sure that is, and what the field gives with one well out of service; the workbook's sheet of
// rates says the same.
func TestConsoleSaysWhoStandsStill(t *testing.T) {
	d := twoCanals(turns(1)[0])
	d.toml = strings.Replace(d.toml, "aim = \"most-yield\"\n", "aim = \"most-yield\"\nat_most_running = 1\n", 1) + "[mesh]\nnodes = 600\n"
	var out, errs bytes.Buffer
	if code := run(context.Background(), []string{"plan", d.write(t)}, streams{out: &out, err: &errs}); code != exitDone {
		t.Fatalf("exit code %d\n%s", code, errs.String())
	}
	for _, words := range []string{" stand still. No other choice of running wells is better by more than a ten-millionth of the aim.", "Firm capacity: ", " out of service, the well whose loss costs the most"} {
		if !strings.Contains(out.String(), words) {
			t.Errorf("the console lacks %q:\n%s", words, out.String())
		}
	}
}
