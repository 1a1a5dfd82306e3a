package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"springbound/plan"
)

// statesTable is the field in an average year, a peak month and a drought; demand is that of the peak month.
func statesTable(demand string) string {
	return "name,default,demand,recharge_factor,days,months\naverage,yes,,1,275.25,9-5\npeak month,no," + demand + ",1,30,6\ndrought,no,,0.4,60,7-8\n"
}

// threeStates is the two canals with recharge, in three states; the drought has a limit on a level, which less recharge lowers.
func threeStates(demand string) draft {
	d := twoCanals(turns(1)[0])
	d.toml = strings.Replace(d.toml, "[brief]", "recharge = \"0.3 mm/d\"\n[brief]", 1) +
		"[[brief.quota]]\nname = \"field\"\nwells = [\"W1\", \"W2\", \"W3\"]\nper_year = \"400000 m3\"\nper_hour = \"60 m3\"\n[mesh]\nnodes = 600\n"
	d.tables["limits"] = "id,receptor,quantity,sense,value,unit,state,source\nL1,P1,change,at_most,0.30,m,,invented\nL2,P2,change,at_most,0.25,m,,invented\nD1,P1,value,at_least,9.95,m,drought,invented\n"
	d.tables["states"] = statesTable(demand)
	d.tables["licences"] = "id,holder,wells,per_day,start_day,months,source\nA1,Marl Water,W2,900 m3,04-01,1-8,deed\nA2,Marl Water,W2,500 m3,,9-12,deed\n"
	return d
}

func command(t testing.TB, want int, args ...string) string {
	t.Helper()
	var out, errs bytes.Buffer
	if code := run(context.Background(), args, streams{out: &out, err: &errs}); code != want {
		t.Fatalf("%v: exit code %d, want %d\n%s%s", args, code, want, out.String(), errs.String())
	}
	return out.String() + errs.String()
}

func readReport(t testing.TB, name string) *plan.Report {
	t.Helper()
	data, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	var r plan.Report
	if err := json.Unmarshal(data, &r); err != nil {
		t.Fatal(err)
	}
	return &r
}

// The whole way: three states in one plan, with one factorisation and one further solve a state for its heads; the drought's levels without
// pumping are those of a project with that recharge; rates.csv leads back to the same figures.
func TestThreeStatesThroughTheCommandLine(t *testing.T) {
	dir := threeStates("1000 m3").write(t)
	if said := command(t, exitBadData, "check", dir); !strings.Contains(said, "demand") { // a volume is no rate
		t.Errorf("%s", said)
	}
	dir = threeStates("1000 m3/d").write(t)
	if said := command(t, exitDone, "check", dir); !strings.Contains(said, "0 errors") {
		t.Errorf("%s", said)
	}
	said := command(t, exitDone, "plan", dir)
	for _, want := range []string{"Largest yearly mean of the total rate", "peak month: 1000.0 m³/d for a demand of 1000.0 m³/d, 30 days", "drought: ", "field, per year: 400000 m³ of 400000 m³; binds."} {
		if !strings.Contains(said, want) {
			t.Errorf("no %q in\n%s", want, said)
		}
	}
	r := readReport(t, filepath.Join(dir, "out", "plan.json"))
	if !r.ModelValid || len(r.States) != 3 || r.Audit.Factorisations != 1 {
		t.Fatalf("valid %v (%v), %d states, %d factorisations", r.ModelValid, r.Invalid, len(r.States), r.Audit.Factorisations)
	}
	volume := 0.0
	for k, s := range r.States {
		for _, w := range s.Wells {
			volume += w.Rate * []float64{275.25, 30, 60}[k]
		}
	}
	if !(math.Abs(volume-400000) <= 1e-6*400000) { // the quota is kept within a ten-millionth
		t.Errorf("%v m³ in the year", volume)
	}
	if rate := r.States[0].Wells[1].Rate; !(rate <= 500*(1+1e-7)) { // September to December: 500 m³/d, as A2 says; A1 counts too
		t.Errorf("W2 in the average state: %v", rate)
	}
	alone := threeStates("")
	alone.tables["states"] = "name,recharge_factor\ndrought,0.4\n"
	alone.tables["limits"] = strings.ReplaceAll(alone.tables["limits"], ",m,,", ",m,drought,")
	one := planned(t, alone.write(t), exitDone)
	for i, rec := range r.States[2].Receptors {
		want := one.Receptors[i].NoPumping
		if !(math.Abs(rec.NoPumping-want) <= 1e-9*math.Abs(want)) || rec.NoPumping == r.Receptors[i].NoPumping {
			t.Errorf("%s without pumping in the drought: %.12g, want %.12g", rec.ID, rec.NoPumping, want)
		}
	}
	for i, w := range r.States[2].Wells {
		if want := one.Wells[i].StaticLevel; !(math.Abs(w.StaticLevel-want) <= 1e-9*math.Abs(want)) {
			t.Errorf("%s at rest in the drought: %.12g, want %.12g", w.ID, w.StaticLevel, want)
		}
	}
	command(t, exitDone, "try", dir, filepath.Join(dir, "out", "rates.csv"))
	given := readReport(t, filepath.Join(dir, "out-try", "try.json"))
	for k, s := range r.States {
		for i, rec := range s.Receptors {
			for n, l := range rec.Limits {
				if got := given.States[k].Receptors[i].Limits[n].Value; !(math.Abs(got-l.Value) <= 1e-9) { // one matrix, the same rates [m]
					t.Errorf("%s in %s: %v tried, %v planned", l.ID, s.Name, got, l.Value)
				}
			}
		}
	}
	save(t, dir, "same.csv", []byte("id,rate [m3/d]\nW1,300\n"))
	command(t, exitDone, "try", dir, filepath.Join(dir, "same.csv"))
	for _, s := range readReport(t, filepath.Join(dir, "out-try", "try.json")).States {
		if s.Wells[0].Rate != 300 || s.Wells[1].Rate != 0 {
			t.Errorf("%s: %+v", s.Name, s.Wells[:2])
		}
	}
	save(t, dir, "lost.csv", []byte("state,id,rate [m3/d]\ndroght,W1,300\n"))
	if said := command(t, exitBadData, "try", dir, filepath.Join(dir, "lost.csv")); !strings.Contains(said, "did you mean drought?") {
		t.Errorf("%s", said)
	}
}

// A demand that one state cannot meet is explained with its name.
func TestStateThatCannotBeMet(t *testing.T) {
	dir := threeStates("3000 m3/d").write(t)
	said := command(t, exitNoPlan, "plan", dir)
	if !strings.Contains(said, "peak month: These cannot all be kept") || !strings.Contains(said, "in conflict: required total (peak month) 3 000 m³/d") {
		t.Errorf("%s", said)
	}
}

// where and curve are about one state alone, and say so.
func TestOneStateOfSeveral(t *testing.T) {
	dir := threeStates("1000 m3/d").write(t)
	for _, c := range []struct{ flag, state, says string }{{"", "average", ""}, {"--state=drought", "drought", ""}} {
		args := []string{"curve", dir, "--limit", "L1"}
		if c.flag != "" {
			args = append(args, c.flag)
		}
		said := command(t, exitDone, args...)
		if !strings.Contains(said, fmt.Sprintf("For the operating state %q alone", c.state)) {
			t.Errorf("%s", said)
		}
		args = append([]string{"where", dir, "--count", "2"}, args[4:]...)
		command(t, exitDone, args...)
		var w whereResult
		data, err := os.ReadFile(filepath.Join(dir, "out", "where.json"))
		if err != nil {
			t.Fatal(err)
		}
		if err := json.Unmarshal(data, &w); err != nil || !strings.Contains(strings.Join(w.Notes, "\n"), fmt.Sprintf("For the operating state %q alone", c.state)) {
			t.Errorf("%v %q", err, w.Notes)
		}
		limits := 2
		if c.state == "drought" {
			limits = 3
		}
		for _, l := range w.Limits {
			if !strings.HasPrefix(l.Name, "lowest level") {
				limits--
			}
		}
		if limits != 0 {
			t.Errorf("%s: %+v", c.state, w.Limits)
		}
	}
	if said := command(t, exitUsage, "curve", dir, "--limit", "L1", "--state", "flood"); !strings.Contains(said, `no operating state "flood"`) {
		t.Errorf("%s", said)
	}
}

// The same bytes for one processor and for two.
func TestStatesSameBytes(t *testing.T) {
	dir := threeStates("1000 m3/d").write(t)
	var first map[string][]byte
	for _, workers := range []string{"1", "2"} {
		out := filepath.Join(dir, "out"+workers)
		command(t, exitDone, "plan", dir, "--workers", workers, "--out", out)
		files := map[string][]byte{}
		for _, name := range []string{"plan.json", "plan.xlsx", "rates.csv"} {
			data, err := os.ReadFile(filepath.Join(out, name))
			if err != nil {
				t.Fatal(err)
			}
			files[name] = data
			if first != nil && !bytes.Equal(first[name], data) {
				t.Errorf("%s differs", name)
			}
		}
		first = files
	}
}

// Where features switch each state has its own: what is stated is what a full solve of that state finds, and limits are kept in each.
func TestStatesThatSwitch(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 2))
	switched := 0
	for k := range 4 {
		d := dryingSite(rng)
		d.toml = strings.Replace(d.toml, "[brief]", "recharge = \"0.4 mm/d\"\n[brief]", 1)
		d.tables["states"] = "name,default,recharge_factor,days\naverage,no,1,300\ndry,yes,0.2,65\n"
		r := planned(t, d.write(t), exitDone)
		if r.Status != plan.StatusOptimal || !r.ModelValid {
			t.Fatalf("site %d: %s, %v", k, r.Status, r.Invalid)
		}
		for _, c := range r.Checks {
			if strings.HasPrefix(c.Name, "Features that switch") && !strings.HasPrefix(c.Detail, "none") {
				switched++
			}
		}
		for _, s := range r.States {
			for _, rec := range s.Receptors {
				if d := math.Abs(rec.Change - rec.ChangeResolved); !(d <= settledTolerance) {
					t.Errorf("site %d, %s in %s: stated %.9f, solved %.9f", k, rec.ID, s.Name, rec.Change, rec.ChangeResolved)
				}
				if over := rec.ChangeResolved - rec.Limits[0].Limit; over > settledTolerance {
					t.Errorf("site %d, %s in %s: passes its limit by %.2e m", k, rec.ID, s.Name, over)
				}
			}
		}
	}
	if switched == 0 {
		t.Error("no site switches")
	}
}
