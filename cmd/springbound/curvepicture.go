package main

import (
	"bytes"
	"fmt"
	"math"
	"strconv"
	"strings"

	"springbound/plan"
)

// The picture's frame in points.
const (
	pictureWidth, pictureHeight = 720, 440
	frameLeft, frameRight       = 90, 690
	frameTop, frameBottom       = 60, 370
)

// curvePicture is a line plot in black and greys: axes with units, corners as dots, the present limit as a dashed line.
func curvePicture(r *plan.CurveReport, unit shownUnit) []byte {
	factor, aim := aimScale(r)
	var b bytes.Buffer
	fmt.Fprintf(&b, `<svg xmlns="http://www.w3.org/2000/svg" width="%d" height="%d" viewBox="0 0 %d %d" font-family="sans-serif" font-size="13" fill="#111">`+"\n",
		pictureWidth, pictureHeight, pictureWidth, pictureHeight)
	fmt.Fprintf(&b, `<rect width="%d" height="%d" fill="#fff"/>`+"\n", pictureWidth, pictureHeight)
	fmt.Fprintf(&b, `<text x="%d" y="24" font-size="15">%s</text>`+"\n", frameLeft, escaped(upper(r.What)+" against one limit"))
	fmt.Fprintf(&b, `<text x="%d" y="44" fill="#444">%s</text>`+"\n", frameLeft, escaped(r.Words))
	low, high := 0.0, 0.0
	for _, x := range r.Points {
		if x.Value != nil {
			low, high = math.Min(low, factor**x.Value), math.Max(high, factor**x.Value)
		}
	}
	across := ticks(r.From*unit.per, r.To*unit.per)
	up := ticks(low, high)
	low, high = math.Min(low, up[0]), math.Max(high, up[len(up)-1])
	if last := len(up) - 1; last > 0 && high > up[last] {
		high = up[last] + (up[last] - up[last-1])
		up = append(up, high)
	}
	if !(high > low) {
		high = low + 1
	}
	px := func(v float64) float64 {
		return frameLeft + (frameRight-frameLeft)*(v-r.From*unit.per)/((r.To-r.From)*unit.per)
	}
	py := func(v float64) float64 { return frameBottom - (frameBottom-frameTop)*(v-low)/(high-low) }
	for _, v := range up {
		fmt.Fprintf(&b, `<path d="M%d %.1fH%d" stroke="#ddd"/><text x="%d" y="%.1f" text-anchor="end">%s</text>`+"\n", frameLeft, py(v), frameRight, frameLeft-8, py(v)+4, tickText(v))
	}
	for _, v := range across {
		fmt.Fprintf(&b, `<path d="M%.1f %dv6" stroke="#111"/><text x="%.1f" y="%d" text-anchor="middle">%s</text>`+"\n", px(v), frameBottom, px(v), frameBottom+21, tickText(v))
	}
	fmt.Fprintf(&b, `<path d="M%d %dV%dH%d" fill="none" stroke="#111"/>`+"\n", frameLeft, frameTop, frameBottom, frameRight)
	fmt.Fprintf(&b, `<text x="%d" y="%d" text-anchor="middle">limit, %s</text>`+"\n", (frameLeft+frameRight)/2, frameBottom+45, escaped(unit.name))
	fmt.Fprintf(&b, `<text transform="translate(24 %d) rotate(-90)" text-anchor="middle">%s, %s</text>`+"\n", (frameTop+frameBottom)/2, escaped(r.What), aim)
	if r.From <= r.Present && r.Present <= r.To {
		x := px(r.Present * unit.per)
		anchor, dx := "start", 6.0
		if x > (frameLeft+frameRight)/2 {
			anchor, dx = "end", -6
		}
		fmt.Fprintf(&b, `<path d="M%.1f %dV%d" stroke="#555" stroke-dasharray="6 4"/><text x="%.1f" y="%d" text-anchor="%s" fill="#333">present limit %s %s</text>`+"\n",
			x, frameTop, frameBottom, x+dx, frameBottom-10, anchor, tickText(r.Present*unit.per), escaped(unit.name))
	}
	drawLine(&b, r, func(x plan.CurvePoint) (float64, float64) { return px(x.At * unit.per), py(factor * *x.Value) })
	for _, end := range []struct {
		why  string
		x    int
		side string
	}{{r.Before, frameLeft + 6, "start"}, {r.Beyond, frameRight, "end"}} {
		if end.why != "" {
			fmt.Fprintf(&b, `<text x="%d" y="%d" text-anchor="%s" fill="#444">no plan here</text>`+"\n", end.x, frameTop+14, end.side)
		}
	}
	foot := "exact: straight between the dots"
	if !r.Exact {
		foot = "a plan at each dot; nothing is claimed between them"
	}
	fmt.Fprintf(&b, `<text x="%d" y="%d" text-anchor="end" font-size="11" fill="#444">%s</text>`+"\n</svg>\n", frameRight, pictureHeight-8, foot)
	return b.Bytes()
}

// drawLine joins neighbouring points that have a value, and puts a dot on each; the present limit's is open.
func drawLine(b *bytes.Buffer, r *plan.CurveReport, place func(plan.CurvePoint) (x, y float64)) {
	dash := ""
	if !r.Exact {
		dash = ` stroke-dasharray="2 3"`
	}
	path, joined := "", false
	var dots strings.Builder
	for _, p := range r.Points {
		if p.Value == nil {
			joined = false
			continue
		}
		x, y := place(p)
		step := "M"
		if joined {
			step = "L"
		}
		path, joined = path+fmt.Sprintf("%s%.1f %.1f", step, x, y), true
		fill := "#111"
		if p.Present {
			fill = "#fff"
		}
		fmt.Fprintf(&dots, `<circle cx="%.1f" cy="%.1f" r="4" fill="%s" stroke="#111" stroke-width="1.5"/>`+"\n", x, y, fill)
	}
	if path != "" {
		fmt.Fprintf(b, `<path d="%s" fill="none" stroke="#111" stroke-width="2"%s/>`+"\n", path, dash)
	}
	b.WriteString(dots.String())
}

// ticks are round values, four to nine of them, from just above low to high.
func ticks(low, high float64) []float64 {
	span := high - low
	if !(span > 0) {
		return []float64{low}
	}
	step := math.Pow(10, math.Floor(math.Log10(span)))
	for _, f := range []float64{1, 0.5, 0.2, 0.1} {
		if s := step * f; span/s >= 4 {
			step = s
			break
		}
	}
	var out []float64
	const slip = 1e-9 // a tick at the very end is kept against rounding
	for k := math.Ceil(low/step - slip); k*step <= high+slip*step; k++ {
		out = append(out, k*step)
	}
	return out
}

func tickText(v float64) string {
	v, _ = strconv.ParseFloat(strconv.FormatFloat(v, 'g', 6, 64), 64)
	if v == 0 {
		return "0"
	}
	return strconv.FormatFloat(v, 'f', -1, 64)
}

var markup = strings.NewReplacer("&", "&amp;", "<", "&lt;", ">", "&gt;", `"`, "&quot;")

func escaped(text string) string { return markup.Replace(text) }
