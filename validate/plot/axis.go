package plot

import (
	"math"
	"strconv"
	"strings"
)

// Tick is a mark on an axis; a Label is empty between the labelled ones.
type Tick struct {
	Value float64
	Label string
}

// Scale is the extent of an axis, with its ticks.
type Scale struct {
	Low, High float64
	Log       bool
	Ticks     []Tick
}

// Place returns the place of v along the axis, 0 to 1.
func (s *Scale) Place(v float64) float64 {
	if s.Log {
		return math.Log(v/s.Low) / math.Log(s.High/s.Low)
	}
	return (v - s.Low) / (s.High - s.Low)
}

// margin is the part of the extent of the data that stays free on either side.
const margin = 0.035

// Scales returns the axes of a panel, wide enough for all its series.
func (p *Panel) Scales() (x, y Scale) {
	var xs, ys []float64
	for i := range p.Series {
		s := &p.Series[i]
		xs, ys = append(append(xs, s.X...), s.X2...), append(append(ys, s.Y...), s.Y2...)
	}
	return scale(&p.X, xs), scale(&p.Y, ys)
}

func scale(a *Axis, values []float64) Scale {
	if n := len(a.Categories); n > 0 {
		s := Scale{Low: -0.5, High: float64(n) - 0.5}
		names := a.Categories
		if a.Short != nil {
			names = a.Short
		}
		for i, c := range names {
			s.Ticks = append(s.Ticks, Tick{float64(i), c})
		}
		return s
	}
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range values {
		lo, hi = math.Min(lo, v), math.Max(hi, v)
	}
	switch {
	case lo > hi && a.Log:
		lo, hi = 1, 10
	case lo > hi:
		lo, hi = 0, 1
	}
	if a.Log {
		return logScale(lo, hi)
	}
	if pad := margin * (hi - lo); pad > 1e-9*math.Abs(hi) {
		lo, hi = lo-pad, hi+pad
	} else {
		pad = math.Max(math.Abs(hi)*0.01, 1e-6)
		lo, hi = lo-pad, hi+pad
	}
	return linearScale(lo, hi)
}

// linearScale puts three to eight ticks at multiples of 1, 2 or 5 times a power of ten.
func linearScale(lo, hi float64) Scale {
	s := Scale{Low: lo, High: hi}
	raw := (hi - lo) / 7.5 // a step is up to 2.5 times as long, which leaves three ticks
	power := math.Pow(10, math.Floor(math.Log10(raw)))
	step := 10 * power
	for _, k := range []float64{1, 2, 5} {
		if k*power >= raw*0.999 {
			step = k * power
			break
		}
	}
	decimals := max(0, -int(math.Floor(math.Log10(step)+1e-9)))
	for n := math.Ceil(lo/step - 1e-9); n*step <= hi+1e-9*step; n++ {
		s.Ticks = append(s.Ticks, Tick{n * step, TickText(n*step, decimals)})
	}
	return s
}

func logScale(lo, hi float64) Scale {
	if hi/lo < 1.5 {
		lo, hi = lo/1.25, hi*1.25
	}
	pad := math.Pow(hi/lo, margin)
	s := Scale{Low: lo / pad, High: hi * pad, Log: true}
	first, last := math.Floor(math.Log10(s.Low)), math.Ceil(math.Log10(s.High))
	few := math.Log10(s.High/s.Low) < 2.3
	labelled := 0
	for d := first; d <= last; d++ {
		for k := 1.0; k < 10; k++ {
			v := k * math.Pow(10, d)
			if v < s.Low || v > s.High {
				continue
			}
			t := Tick{Value: v}
			if k == 1 || few && (k == 2 || k == 5) {
				t.Label = TickText(v, max(0, -int(d)))
			}
			if t.Label != "" {
				labelled++
			}
			s.Ticks = append(s.Ticks, t)
		}
	}
	if labelled < 3 {
		// So short a stretch is nearly even: ticks at even steps.
		s.Ticks = linearScale(s.Low, s.High).Ticks
	}
	return s
}

// TickText prints a number with a true minus sign, and thousands apart by a thin space.
func TickText(v float64, decimals int) string {
	if math.Abs(v) >= 1e6 || v != 0 && math.Abs(v) < 1e-5 {
		return strings.ReplaceAll(strconv.FormatFloat(v, 'g', 3, 64), "-", "−")
	}
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	whole, rest, _ := strings.Cut(s, ".")
	sign := ""
	if strings.HasPrefix(whole, "-") {
		sign, whole = "−", whole[1:]
	}
	if len(whole) > 4 {
		whole = whole[:len(whole)-3] + "\u2009" + whole[len(whole)-3:]
	}
	if rest != "" {
		return sign + whole + "." + rest
	}
	return sign + whole
}
