package wells

import (
	"math"
	"testing"
)

// Section 8 of the check values: step test after Clark (1977), from memory there; the arithmetic is computed to the printed digits.
func TestJacobLossOfAStepTest(t *testing.T) {
	w := Well{DutyHours: 24, LinearLoss: 3.26e-3, QuadraticLoss: 1.45e-7}
	for _, c := range []struct{ rate, loss, efficiency float64 }{
		{1306, 4.504877, 0.945100}, {2423, 8.750265, 0.902713}, {5019, 20.014542, 0.817503},
	} {
		if got := w.Loss(c.rate); math.Abs(got-c.loss) > 5e-7 { // half the last printed digit
			t.Errorf("loss at %v m³/d is %.7f m, want %.6f", c.rate, got, c.loss)
		}
		if got := w.LinearLoss * c.rate / w.Loss(c.rate); math.Abs(got-c.efficiency) > 5e-7 {
			t.Errorf("efficiency at %v m³/d is %.7f, want %.6f", c.rate, got, c.efficiency)
		}
	}
}

// The pump answers to the running rate: half the hours double the rate and quadruple the turbulent loss.
func TestRunningRateDrivesTheLoss(t *testing.T) {
	w := Well{DutyHours: 12, LinearLoss: 1e-3, QuadraticLoss: 1e-6}
	if got := w.RunningRate(600); got != 1200 {
		t.Errorf("running rate %v, want 1200", got)
	}
	if got, want := w.Loss(600), 1e-3*1200+1e-6*1200*1200; math.Abs(got-want) > 1e-12 {
		t.Errorf("loss %v, want %v", got, want)
	}
	if got, want := w.LinearLossSlope()*600, 1e-3*1200; math.Abs(got-want) > 1e-12 {
		t.Errorf("linear part %v, want %v", got, want)
	}
	if got := w.Loss(-600); got != -w.Loss(600) {
		t.Errorf("a recharging well's loss %v is not that of pumping turned round", got)
	}
}

// Every kind's word reads back, every kind has a unit.
func TestKindWords(t *testing.T) {
	words := KindWords()
	if len(words) != int(PumpingLevel)+1 {
		t.Fatalf("%d words for %d kinds", len(words), PumpingLevel+1)
	}
	for i, word := range words {
		k, ok := ParseKind(word)
		if !ok || k != Kind(i) || k.String() != word {
			t.Errorf("%q reads back as %v", word, k)
		}
		if u := k.Unit(); u != "m" && u != "m3/d" && u != "1" {
			t.Errorf("%s has the unit %q", word, u)
		}
	}
	if _, ok := ParseKind("Wetland"); ok {
		t.Error("a word in another case is taken")
	}
}
