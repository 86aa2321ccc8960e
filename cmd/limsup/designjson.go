package main

import "limsup/fit/design/campaign"

// This file is the JSON form of a plan.

type designJSON struct {
	Target      string              `json:"target"`
	Batch       int                 `json:"batch"`
	FromScratch bool                `json:"from_scratch"`
	Next        string              `json:"next"`
	Mean        plannedMeanJSON     `json:"mean_standard_uncertainty"`
	Quantities  []quantityJSON      `json:"quantities"`
	Parameters  []plannedJSON       `json:"parameters"`
	Candidates  []readingJSON       `json:"candidates"`
	Singles     []plannedSingleJSON `json:"singles"`
	Steps       []plannedStepJSON   `json:"steps"`
	Groups      []plannedGroupJSON  `json:"groups"`
	Spaced      []int               `json:"evenly_spaced_counts"`
	Verdict     *verdictJSON        `json:"expected_verdict"`
	Tell        *tellJSON           `json:"tell_apart"`
	SampleSizes []sizeJSON          `json:"sample_sizes"`
	Check       *designCheckJSON    `json:"check"`
	Stored      []storedJSON        `json:"stored_energy"`
	Unusable    []unusableJSON      `json:"unusable"`
	Notes       []string            `json:"notes"`
	Cautions    []string            `json:"cautions"`
}

type plannedMeanJSON struct {
	Now    float64 `json:"now"`
	After  float64 `json:"after"`
	Spaced float64 `json:"evenly_spaced"`
	Factor float64 `json:"factor"`
	Slack  float64 `json:"largest_possible_saving"`
}

type quantityJSON struct {
	Label  string  `json:"label"`
	Unit   string  `json:"unit"`
	Value  float64 `json:"value"`
	Now    float64 `json:"standard_uncertainty_now"`
	After  float64 `json:"standard_uncertainty_after"`
	Spaced float64 `json:"standard_uncertainty_evenly_spaced"`
}

type plannedJSON struct {
	Label   string  `json:"label"`
	Unit    string  `json:"unit"`
	Value   float64 `json:"value"`
	Now     float64 `json:"standard_uncertainty_now"`
	After   float64 `json:"standard_uncertainty_after"`
	Assumed bool    `json:"only_bounds_known"`
}

type readingJSON struct {
	Fluid       string   `json:"fluid"`
	Pressure    float64  `json:"pressure_Pa"`
	Method      string   `json:"method"`
	Batch       string   `json:"batch,omitempty"`
	Volume      *float64 `json:"volume_m3"`
	HeatingRate *float64 `json:"heating_rate_K_s"`
	HoldingTime *float64 `json:"holding_time_s"`
	Expected    float64  `json:"expected_K"`
	U           float64  `json:"standard_deviation_K"`
	Log10Flux   *float64 `json:"log10_flux"`
	Difference  *float64 `json:"rival_difference_K,omitempty"`
	Warnings    []string `json:"warnings,omitempty"`
}

type plannedSingleJSON struct {
	Candidate int      `json:"candidate"`
	After     float64  `json:"mean_standard_uncertainty"`
	Gain      float64  `json:"gain"`
	Repeats   *int     `json:"repeats_until_gain_stops"`
	Bounded   bool     `json:"repeats_not_followed_further,omitempty"`
	Then      *float64 `json:"mean_standard_uncertainty_then"`
	Why       string   `json:"why,omitempty"`
}

type plannedStepJSON struct {
	Candidate int     `json:"candidate"`
	After     float64 `json:"mean_standard_uncertainty"`
}

type plannedGroupJSON struct {
	Candidate int    `json:"candidate"`
	Count     int    `json:"count"`
	Why       string `json:"why"`
}

type verdictJSON struct {
	Better float64 `json:"better"`
	Worse  float64 `json:"worse"`
}

type tellJSON struct {
	Rival       string  `json:"rival"`
	UNow        float64 `json:"standard_uncertainty_now"`
	UAfter      float64 `json:"standard_uncertainty_after"`
	USpaced     float64 `json:"standard_uncertainty_evenly_spaced"`
	PowerNow    float64 `json:"power_now"`
	PowerAfter  float64 `json:"power_after"`
	PowerSpaced float64 `json:"power_evenly_spaced"`
	Right       float64 `json:"right_choice"`
}

type sizeJSON struct {
	Half    float64 `json:"half_width_K"`
	Level   float64 `json:"level"`
	Mean    int     `json:"droplets_of_a_mean"`
	Planned *int    `json:"planned_through_the_model"`
}

type designCheckJSON struct {
	Campaigns     int            `json:"campaigns"`
	Failed        int            `json:"failed"`
	FirstError    string         `json:"first_error,omitempty"`
	AtBound       int            `json:"with_a_parameter_at_a_bound"`
	Quantities    []realisedJSON `json:"quantities"`
	Spaced        []realisedJSON `json:"evenly_spaced"`
	Right         *float64       `json:"right_choice"`
	PromisedRight *float64       `json:"promised_right_choice"`
	Notes         []string       `json:"notes"`
}

type realisedJSON struct {
	Label    string  `json:"label"`
	Unit     string  `json:"unit"`
	Promised float64 `json:"promised"`
	Realised float64 `json:"realised"`
	SE       float64 `json:"realised_standard_error"`
	Bias     float64 `json:"bias"`
}

type storedJSON struct {
	Fluid          string   `json:"fluid"`
	Pressure       float64  `json:"pressure_Pa"`
	Temperature    float64  `json:"temperature_K"`
	Volume         *float64 `json:"volume_m3"`
	Mass           *float64 `json:"mass_kg"`
	Energy         *float64 `json:"energy_bound_J"`
	SpecificEnergy float64  `json:"energy_bound_J_kg"`
	Expansion      float64  `json:"expansion"`
	SaturationP    float64  `json:"saturation_pressure_Pa"`
	Hazard         string   `json:"hazard"`
	Flammable      bool     `json:"flammable_or_oxidising"`
	Toxic          bool     `json:"harmful_or_toxic"`
	Asphyxiant     bool     `json:"asphyxiant"`
}

type unusableJSON struct {
	Fluid    string  `json:"fluid"`
	Pressure float64 `json:"pressure_Pa"`
	Method   string  `json:"method"`
	Reason   string  `json:"reason"`
}

func (d *campaignDesign) json(sizes []campaign.Droplets, stored []campaign.Stored) *designJSON {
	j := &designJSON{Target: d.Target.Criterion(), Batch: d.N, FromScratch: d.Fresh, Next: d.describe(d.Singles[0].Reading) + ". " + d.Singles[0].Why,
		Mean:       plannedMeanJSON{d.Before, d.After, d.Spaced, d.Factor(), d.Slack},
		Quantities: []quantityJSON{}, Parameters: []plannedJSON{}, Candidates: []readingJSON{}, Singles: []plannedSingleJSON{}, Steps: []plannedStepJSON{}, Groups: []plannedGroupJSON{},
		Spaced: d.SpacedCount, SampleSizes: []sizeJSON{}, Stored: []storedJSON{}, Unusable: []unusableJSON{}, Notes: append([]string{}, d.Notes...), Cautions: d.cautions(stored)}
	for i := range d.Quantities {
		q := &d.Quantities[i]
		j.Quantities = append(j.Quantities, quantityJSON{q.Label, q.Unit, q.Value, q.Before, q.After, q.Spaced})
	}
	for i := range d.Parameters {
		x := &d.Parameters[i]
		j.Parameters = append(j.Parameters, plannedJSON{x.Label, x.Unit, x.Value, x.Before, x.After, x.Assumed})
	}
	for i := range d.Readings {
		r := &d.Readings[i]
		j.Candidates = append(j.Candidates, readingJSON{r.Record.Key, r.Pressure, r.Method, r.Batch, optional(r.Volume, r.Volume > 0), optional(r.HeatingRate, r.HeatingRate > 0),
			optional(r.HoldingTime, r.HoldingTime > 0), r.Expected, r.U, optional(r.Log10J, r.HasFlux), optional(r.Difference, d.Tell != nil), r.Warnings})
	}
	for i := range d.Singles {
		s := &d.Singles[i]
		x := plannedSingleJSON{Candidate: s.Reading, After: s.After, Gain: s.Gain, Bounded: s.Bounded, Why: s.Why}
		if s.AtStop > 0 {
			x.Repeats, x.Then = &s.Repeats, &s.AtStop
		}
		j.Singles = append(j.Singles, x)
	}
	for _, s := range d.Steps {
		j.Steps = append(j.Steps, plannedStepJSON{s.Reading, s.After})
	}
	for _, g := range d.Groups {
		j.Groups = append(j.Groups, plannedGroupJSON{g.Reading, g.Count, g.Why})
	}
	if v := &d.Verdict; v.Reason == "" && d.Tell == nil {
		j.Verdict = &verdictJSON{v.Better, v.Worse}
	}
	if t := d.Tell; t != nil {
		j.Tell = &tellJSON{t.Rival, t.UBefore, t.UAfter, t.USpaced, t.PowerBefore, t.PowerAfter, t.PowerSpaced, t.RightAfter}
	}
	for i := range sizes {
		s := &sizes[i]
		x := sizeJSON{Half: s.Half, Level: s.Level, Mean: s.Mean}
		if s.Reached {
			x.Planned = &s.Planned
		}
		j.SampleSizes = append(j.SampleSizes, x)
	}
	for i := range stored {
		s := &stored[i]
		has := s.Volume > 0
		j.Stored = append(j.Stored, storedJSON{s.Fluid, s.Pressure, s.Temperature, optional(s.Volume, has), optional(s.Mass, has), optional(s.Energy, has),
			s.SpecificEnergy, s.Expansion, s.SaturationP, s.Hazard, s.Flammable, s.Toxic, s.Asphyxiant})
	}
	for i := range d.Unusable {
		u := &d.Unusable[i]
		j.Unusable = append(j.Unusable, unusableJSON{u.Record.Key, u.Pressure, u.Method, u.Reason})
	}
	j.Check = d.checkJSON()
	return j
}

func (d *campaignDesign) checkJSON() *designCheckJSON {
	c := d.check
	if c == nil {
		return nil
	}
	list := func(rs []campaign.Realised) []realisedJSON {
		out := []realisedJSON{}
		for _, r := range rs {
			out = append(out, realisedJSON{r.Label, r.Unit, r.Promised, r.SD, r.SE, r.Bias})
		}
		return out
	}
	return &designCheckJSON{c.Campaigns, c.Failed, c.FirstError, c.AtBound, list(c.Quantities), list(c.Spaced),
		optional(c.Right, d.Tell != nil), optional(c.PromisedRight, d.Tell != nil), append([]string{}, c.Notes...)}
}
