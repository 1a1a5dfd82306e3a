package varrow

import (
	"encoding/json"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"testing"
)

// The example is run as a user runs it. Asserted: the total rate that the limits allow, to the half per cent by which the mesh may move
// it; that the spring's limit binds; that the pumped water's sources sum to all of it.
func TestVarrowBight(t *testing.T) {
	if _, err := exec.LookPath("go"); err != nil {
		t.Skip("no go command to build with")
	}
	dir := t.TempDir()
	program := filepath.Join(dir, "springbound")
	if out, err := exec.Command("go", "build", "-o", program, "springbound/cmd/springbound").CombinedOutput(); err != nil {
		t.Fatalf("build: %v\n%s", err, out)
	}
	if out, err := exec.Command(program, "plan", "--out", filepath.Join(dir, "out"), ".").CombinedOutput(); err != nil {
		t.Fatalf("plan: %v\n%s", err, out)
	}
	data, err := os.ReadFile(filepath.Join(dir, "out", "plan.json"))
	if err != nil {
		t.Fatal(err)
	}
	var r struct {
		Total     float64 `json:"total_rate_m3_per_d"`
		Valid     bool    `json:"model_valid"`
		Receptors []struct {
			ID     string
			Limits []struct {
				Binds bool
				Price float64 `json:"shadow_price"`
			}
		}
		Capture []struct{ Share *float64 }
	}
	if err := json.Unmarshal(data, &r); err != nil {
		t.Fatal(err)
	}
	const total = 4512 // m³/d
	if !r.Valid || math.Abs(r.Total/total-1) > 0.005 {
		t.Errorf("total %.1f m³/d (valid %v), want %.0f", r.Total, r.Valid, float64(total))
	}
	found := false
	for _, rec := range r.Receptors {
		if rec.ID == "HOLM" {
			found = rec.Limits[0].Binds && rec.Limits[0].Price > 0
		}
	}
	if !found {
		t.Error("the spring's limit does not bind with a price")
	}
	sum := 0.0
	for _, c := range r.Capture {
		sum += *c.Share
	}
	if math.Abs(sum-1) > 1e-9 { // rounding of the adjoint solves
		t.Errorf("the sources' shares sum to %.12f", sum)
	}
}
