package main

import (
	"github.com/urfave/cli/v2"

	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/fit"
)

// task is what a calibration starts from.
type task struct {
	library *fluid.Library
	set     *measure.Set
	plan    fit.Plan
}

// taskFromFlags reads the fluids, the measurements and the plan.
func taskFromFlags(c *cli.Context) (*task, error) {
	t := &task{}
	var err error
	if t.library, t.set, err = measured(c); err != nil {
		return nil, err
	}
	t.plan, err = planFromFlags(c)
	return t, err
}

// measured reads the fluids and the measurements.
func measured(c *cli.Context) (*fluid.Library, *measure.Set, error) {
	lib, err := library(c)
	if err != nil {
		return nil, nil, err
	}
	set, err := readData(c, lib)
	return lib, set, err
}

// tune prepares the measurements and calibrates. An error about too few rows names the
// excluded ones.
func (t *task) tune() (*fit.Calibration, error) {
	d, err := fit.Prepare(t.set, t.library, t.plan)
	if err != nil {
		return nil, err
	}
	cal, err := fit.Calibrate(d, t.plan, fit.Options{})
	if err != nil {
		return nil, withExclusions(err, d)
	}
	return cal, nil
}
