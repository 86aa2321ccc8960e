package export

import (
	"bufio"
	"encoding/csv"
	"fmt"
	"io"

	"limsup/data/fluid"
	"limsup/fit"
	"limsup/fit/export/internal/translate"
)

// list writes a CSV file: comment lines, a head, rows.
func list(w io.Writer, comments []string, head []string, rows [][]string) error {
	b := bufio.NewWriter(w)
	for _, c := range comments {
		for _, l := range translate.Wrap(c, 110) {
			if _, err := fmt.Fprintln(b, "#", l); err != nil {
				return err
			}
		}
	}
	c := csv.NewWriter(b)
	if err := c.WriteAll(append([][]string{head}, rows...)); err != nil {
		return err
	}
	return b.Flush()
}

// comments begin every list.
func (s *subject) comments(what string) []string {
	out := []string{what + ": " + s.title() + ".", "Written by limsup" + after(" ", s.o.Version) + "."}
	return append(append(out, s.provenance()...), s.o.Cautions...)
}

// parameters writes every parameter with its uncertainty and its correlations; for a
// model without calibration, the values that its fluids have.
func (s *subject) parameters(w io.Writer) error {
	head := []string{"parameter", "name", "by", "group", "role", "unit", "value", "standard_uncertainty", "state", "lower", "upper", "start"}
	var rows [][]string
	estimated := map[string]bool{}
	for i := range s.model.Parameters {
		e := &s.model.Parameters[i]
		estimated[e.Name] = true
		row := []string{e.Label(), e.Name, string(e.By), e.Group, string(e.Role), e.Unit, number(e.Value), "", "tuned", number(e.Lower), number(e.Upper), number(e.Start)}
		if e.HasU {
			row[7] = number(e.U)
		}
		switch {
		case e.AtBound != "":
			row[8] = "tuned, at its " + e.AtBound + " bound"
		case !e.HasU && e.Reason != "":
			row[8] = "tuned, no uncertainty: " + e.Reason
		}
		rows = append(rows, row)
	}
	for _, x := range s.model.Settings {
		label := fit.Free{Name: x.Name, Group: x.Group, Role: fit.RoleValue}
		estimated[x.Name] = estimated[x.Name] || x.Group == ""
		rows = append(rows, s.fixedRow(label.Label(), x.Name, x.Group, x.Value, "set"))
	}
	for _, p := range fit.ParameterTable() {
		if !estimated[p.Name] && (p.Name != fit.DegreesOfNoise || s.model.Noise.Kind == fit.Student) {
			rows = append(rows, s.fixedRow(p.Name, p.Name, "", s.published(p), "as published"))
		}
	}
	for i := range s.model.Parameters {
		head = append(head, "correlation:"+s.model.Parameters[i].Label())
	}
	for i := range rows {
		for j := range s.model.Parameters {
			rows[i] = append(rows[i], s.correlation(i, j))
		}
	}
	return list(w, s.comments("Parameters of a model of superheat limits"), head, rows)
}

func (s *subject) fixedRow(label, name, group string, value float64, state string) []string {
	for _, p := range fit.ParameterTable() {
		if p.Name == name {
			return []string{label, name, "", group, string(fit.RoleValue), p.Unit, number(value), "", state, "", "", ""}
		}
	}
	return []string{label, name, "", group, "", "", number(value), "", state, "", "", ""}
}

// published is the value of a parameter that was neither tuned nor set.
func (s *subject) published(p fit.Parameter) float64 {
	if p.Name == fit.Spread {
		return 0 // nothing is known of the readings of a model without data
	}
	if p.Name == fit.DegreesOfNoise {
		return s.model.Noise.Degrees
	}
	v := s.model.Values(&fit.Query{Record: &fluid.Record{}})
	for name, value := range map[string]float64{fit.Threshold: v.Threshold, fit.Prefactor: v.Prefactor, fit.Attraction: v.Attraction,
		fit.Covolume: v.Covolume, fit.Slope: v.Slope, fit.SurfaceTension: v.SurfaceTension, fit.Tolman: v.Tolman} {
		if name == p.Name {
			return value
		}
	}
	return p.Start
}

// correlation is that of two estimates, empty where one has no uncertainty.
func (s *subject) correlation(i, j int) string {
	e := s.model.Parameters
	if i >= len(e) || !e[i].HasU || !e[j].HasU || !(e[i].U > 0 && e[j].U > 0) || s.model.Covariance == nil {
		return ""
	}
	if i == j {
		return "1"
	}
	return number(s.model.Covariance.At(i, j) / (e[i].U * e[j].U))
}
