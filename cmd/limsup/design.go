package main

import (
	"fmt"
	"os"
	"strings"

	"github.com/urfave/cli/v2"

	"limsup/data/fluid"
	"limsup/data/quantity"
	"limsup/fit"
	"limsup/fit/design/campaign"
	"limsup/validate"
)

func designCommand() *cli.Command {
	return &cli.Command{
		Name:  "plan",
		Usage: "which measurements to make next, and what they will be worth",
		Description: "Ranks single next measurements and chooses a batch from what the laboratory can do, says what uncertainty each leaves and why, and how large the samples' stored energy is. Without a target all parameters are narrowed together (D-optimal); --narrow and --narrow-limit narrow what they name (c-, I- or D-optimal); --tell-apart finds where a rival variant would be caught.\n\n" +
			"The candidates are the fluids, pressures and methods of the data unless flags or --candidates give others. A file of candidates is TOML: fluid and pressure lists, then one [[setup]] per way to measure, with method, diameter or volume, heating_rate or holding_time, u_temperature, u_pressure, most, and fluid and pressure lists of its own.\n\n" +
			"Examples: limsup plan --data drops.csv --tune prefactor --tune surface-tension --narrow surface-tension\n" +
			"          limsup plan --data drops.csv --model lab.json --narrow-limit \"n-pentane@0.5 MPa\" --batch 6 --check 40\n" +
			"          limsup plan --data drops.csv --tell-apart peng-robinson --candidates can-do.toml",
		Flags: flags([]cli.Flag{dataFlag(),
			&cli.StringSliceFlag{Name: "narrow", Usage: "target: the uncertainty of a tuned `PARAMETER`, NAME or NAME[GROUP]; several are narrowed together (repeatable)"},
			&cli.StringSliceFlag{Name: "narrow-limit", Usage: "target: the uncertainty of a predicted limit, `FLUID@PRESSURE`, e.g. \"n-pentane@0.5 MPa\"; the mean over several (repeatable)"},
			&cli.StringFlag{Name: "tell-apart", Usage: "target: tell the model from another `VARIANT`, written as for limsup compare, e.g. peng-robinson or \"soave; surface-tension=parachor; tune=threshold\""},
			&cli.IntFlag{Name: "batch", Value: 12, Usage: "`NUMBER` of measurements to choose"},
			&cli.BoolFlag{Name: "from-scratch", Usage: "plan as if nothing had been measured yet, at the values of the model"},
			&cli.IntFlag{Name: "check", Usage: "carry the plan out in `NUMBER` simulated campaigns and compare the scatter of the results with the promise"},
			&cli.StringFlag{Name: "candidates", Usage: "TOML `FILE` of what the laboratory can do"},
			&cli.StringSliceFlag{Name: "fluid", Usage: "candidate fluid, `KEY` or name (repeatable)"},
			&cli.StringSliceFlag{Name: "pressure", Usage: "candidate absolute pressure `P` with unit (repeatable)"},
		}, sweepFlags("PRESSURE"), []cli.Flag{
			&cli.StringFlag{Name: "method", Usage: "`METHOD` of the candidates"},
			&cli.StringSliceFlag{Name: "diameter", Usage: "droplet `DIAMETER` with unit (repeatable)"},
			&cli.StringSliceFlag{Name: "volume", Usage: "sample `VOLUME` with unit, instead of a diameter (repeatable)"},
			&cli.StringSliceFlag{Name: "heating-rate", Usage: "heating `RATE` with unit, e.g. \"2 K/s\" (repeatable)"},
			&cli.StringSliceFlag{Name: "holding-time", Usage: "`TIME` with unit at constant temperature, instead of heating (repeatable)"},
			&cli.StringFlag{Name: "u-temperature", Usage: "standard `UNCERTAINTY` of a reading, e.g. \"0.3 K\""},
			&cli.StringFlag{Name: "u-pressure", Usage: "standard `UNCERTAINTY` of the pressure, e.g. \"2 kPa\""},
			&cli.IntFlag{Name: "most", Usage: "`NUMBER` of times one candidate can be measured (default: any)"},
			&cli.IntFlag{Name: "top", Value: 8, Usage: "`NUMBER` of single measurements to show"},
		}, tuneFlags(), modelFlags(), []cli.Flag{formatFlag(), seedFlag(), outFlag("the plan")}),
		Action: func(c *cli.Context) error {
			if err := begin(c); err != nil {
				return err
			}
			d, err := newDesign(c)
			if err != nil {
				return err
			}
			if n := c.Int("check"); c.IsSet("check") {
				if n < 2 || n > 100_000 {
					return &usageError{fmt.Sprintf("--check %d: want 2 to 100000", n)}
				}
				bar := startProgress(c, "carrying out the plan")
				d.check, err = d.Check(c.Context, d.fitPlan, campaign.CheckOptions{Campaigns: n, Seed: c.Uint64("seed"), Spaced: true, Done: bar.Set})
				bar.Stop()
				if err != nil {
					return err
				}
			}
			p, err := d.product(c.Int("top"))
			if err != nil {
				return err
			}
			return show(c, p)
		},
	}
}

// campaignDesign is all that the command shows.
type campaignDesign struct {
	*campaign.Plan
	fitPlan fit.Plan
	library *fluid.Library
	check   *campaign.Check
}

// newDesign reads the model, the data, the candidates and the target, and plans.
func newDesign(c *cli.Context) (*campaignDesign, error) {
	if n := c.Int("batch"); n < 1 || n > 1000 {
		return nil, &usageError{fmt.Sprintf("--batch %d: want 1 to 1000", n)}
	}
	if n := c.Int("top"); n < 1 {
		return nil, &usageError{fmt.Sprintf("--top %d: want 1 or more", n)}
	}
	d := &campaignDesign{}
	in := campaign.Input{N: c.Int("batch"), Fresh: c.Bool("from-scratch"), Seed: c.Uint64("seed")}
	var err error
	if c.String("model") != "" {
		err = d.fromModel(c, &in)
	} else {
		err = d.fromData(c, &in)
	}
	if err != nil {
		return nil, err
	}
	grid, err := candidateGrid(c, in.Data)
	if err != nil {
		return nil, err
	}
	if in.Candidates, err = grid.Expand(d.library); err != nil {
		return nil, err
	}
	if err := d.target(c, &in); err != nil {
		return nil, err
	}
	d.Plan, err = campaign.Make(in)
	return d, err
}

// fromModel takes a calibrated model as it is; data beside it show what was measured.
func (d *campaignDesign) fromModel(c *cli.Context, in *campaign.Input) error {
	for _, f := range []string{"plan", "tune", "fix", "start", "bounds", "prior", "anchor", "noise", "restarts"} {
		if c.IsSet(f) {
			return &usageError{fmt.Sprintf("--model and --%s exclude each other: the model is taken as it is", f)}
		}
	}
	s, err := sourceFromFlags(c)
	if err != nil {
		return err
	}
	d.library, in.Model = s.library, s.model
	d.fitPlan = validate.PlanOf(s.model)
	d.fitPlan.Seed = c.Uint64("seed")
	if len(c.StringSlice("data")) == 0 {
		return nil
	}
	set, err := readData(c, d.library)
	if err != nil {
		return err
	}
	in.Data, err = fit.Prepare(set, d.library, d.fitPlan)
	return err
}

// fromData calibrates first.
func (d *campaignDesign) fromData(c *cli.Context, in *campaign.Input) error {
	t, err := taskFromFlags(c)
	if err != nil {
		return err
	}
	d.library = t.library
	if in.Calibration, err = t.tune(); err != nil {
		return err
	}
	in.Model, in.Data, d.fitPlan = in.Calibration.Model(), in.Calibration.Data, in.Calibration.Plan
	return nil
}

// setupFlags are those that describe one way to measure.
var setupFlags = [...]string{"method", "diameter", "volume", "heating-rate", "holding-time", "u-temperature", "u-pressure", "most"}

// candidateGrid is what the laboratory can do: from a file, from flags, or as in
// its data.
func candidateGrid(c *cli.Context, data *fit.Data) (campaign.Grid, error) {
	name := c.String("candidates")
	var given []string
	for _, f := range setupFlags {
		if c.IsSet(f) {
			given = append(given, f)
		}
	}
	if name != "" {
		for _, f := range append(given, "fluid", "pressure", "from", "to", "count") {
			if c.IsSet(f) {
				return campaign.Grid{}, &usageError{fmt.Sprintf("--candidates and --%s exclude each other: the file says what can be measured", f)}
			}
		}
		f, err := os.Open(name)
		if err != nil {
			return campaign.Grid{}, err
		}
		defer f.Close()
		return campaign.ReadGrid(f, name)
	}
	var g campaign.Grid
	if data != nil {
		g = campaign.GridOf(data)
	}
	pressures, err := quantities(c, "pressure", quantity.Pressure)
	if err != nil {
		return g, err
	}
	more, err := sweep(c, quantity.Pressure, 11)
	if err != nil {
		return g, err
	}
	if pressures = append(pressures, more...); len(pressures) > 0 {
		g.Pressures = pressures
	}
	if fluids := c.StringSlice("fluid"); len(fluids) > 0 {
		g.Fluids = fluids
		for i := range g.Setups {
			g.Setups[i].Fluids = nil
		}
	}
	if len(given) > 0 {
		s, err := setupFromFlags(c, &g)
		if err != nil {
			return g, err
		}
		g.Setups = []campaign.Setup{s}
	}
	if len(g.Setups) == 0 || len(g.Fluids) == 0 || len(g.Pressures) == 0 {
		return g, &usageError{"plan needs candidates: --candidates FILE, or --data, or --fluid and --pressure with at least --u-temperature"}
	}
	return g, nil
}

// setupFromFlags describes one way to measure. What is not given is as in the data
// for a method of that name.
func setupFromFlags(c *cli.Context, g *campaign.Grid) (campaign.Setup, error) {
	s := campaign.Setup{Method: c.String("method"), Most: c.Int("most")}
	for i := range g.Setups {
		if g.Setups[i].Method == s.Method {
			s = g.Setups[i]
			s.Most = c.Int("most")
		}
	}
	if c.IsSet("diameter") && c.IsSet("volume") {
		return s, &usageError{"--diameter and --volume exclude each other"}
	}
	if c.IsSet("heating-rate") && c.IsSet("holding-time") {
		return s, &usageError{"--heating-rate and --holding-time exclude each other: they are two ways to measure (--candidates takes several)"}
	}
	read := func(flag string, d quantity.Dimension) ([]float64, error) { return quantities(c, flag, d) }
	if c.IsSet("diameter") {
		v, err := read("diameter", quantity.Length)
		if err != nil {
			return s, err
		}
		s.Volumes = nil
		for _, x := range v {
			s.Volumes = append(s.Volumes, campaign.Sphere(x))
		}
	}
	for _, k := range [...]struct {
		flag string
		d    quantity.Dimension
		to   *[]float64
		not  *[]float64
	}{{"volume", quantity.Volume, &s.Volumes, nil}, {"heating-rate", quantity.HeatingRate, &s.HeatingRates, &s.HoldingTimes},
		{"holding-time", quantity.Time, &s.HoldingTimes, &s.HeatingRates}} {
		if !c.IsSet(k.flag) {
			continue
		}
		v, err := read(k.flag, k.d)
		if err != nil {
			return s, err
		}
		*k.to = v
		if k.not != nil {
			*k.not = nil
		}
	}
	for _, k := range [...]struct {
		flag string
		d    quantity.Dimension
		to   *float64
	}{{"u-temperature", quantity.Temperature, &s.UTemperature}, {"u-pressure", quantity.Pressure, &s.UPressure}} {
		if !c.IsSet(k.flag) {
			continue
		}
		q, err := quantity.Parse(c.String(k.flag))
		if err == nil {
			*k.to, err = q.DifferenceIn(k.d)
		}
		if err != nil {
			return s, fmt.Errorf("--%s %q: %w", k.flag, c.String(k.flag), err)
		}
	}
	return s, nil
}

// target reads what the plan is for.
func (d *campaignDesign) target(c *cli.Context, in *campaign.Input) error {
	n := 0
	for _, f := range []string{"narrow", "narrow-limit", "tell-apart"} {
		if c.IsSet(f) {
			n++
		}
	}
	if n > 1 {
		return &usageError{"--narrow, --narrow-limit and --tell-apart exclude each other: a plan has one target"}
	}
	in.Target.Parameters = c.StringSlice("narrow")
	for _, s := range c.StringSlice("narrow-limit") {
		name, pressure, ok := strings.Cut(s, "@")
		if !ok {
			return &usageError{fmt.Sprintf("--narrow-limit %q: want FLUID@PRESSURE, e.g. \"n-pentane@0.5 MPa\"", s)}
		}
		r, err := d.library.Find(strings.TrimSpace(name))
		if err != nil {
			return err
		}
		P, err := quantity.ParseIn(pressure, quantity.Pressure)
		if err != nil {
			return fmt.Errorf("--narrow-limit %q: %w", s, err)
		}
		in.Target.Limits = append(in.Target.Limits, campaign.State{Record: r, Pressure: P})
	}
	if s := c.String("tell-apart"); s != "" {
		return d.rival(c, in, s)
	}
	return nil
}

// rival reads another variant and tunes it to the data.
func (d *campaignDesign) rival(c *cli.Context, in *campaign.Input, text string) error {
	k, err := validate.ParseCandidate(text)
	if err != nil {
		return err
	}
	r := &campaign.Rival{Name: k.Plan.Variant.Name()}
	in.Target.Rival = r
	if k.UntunedOnly {
		r.Name += ", untuned"
		r.Model, err = fit.Untuned(k.Plan.Variant, k.Plan.Fixed...)
		return err
	}
	if in.Data == nil {
		return &usageError{"--tell-apart needs --data to tune the other variant to, or tune=none for it as published"}
	}
	if len(k.Plan.Terms) == 0 && k.Plan.Variant.Limit == fit.Spinodal {
		k.Plan.Terms = []fit.Term{{Name: fit.Slope}}
	}
	set, err := readData(c, d.library)
	if err != nil {
		return err
	}
	if r.Calibration, err = (&task{d.library, set, k.Plan}).tune(); err != nil {
		return err
	}
	r.Model = r.Calibration.Model()
	return nil
}
