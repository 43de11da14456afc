package report

import (
	"fmt"
	"io"
	"strings"

	"ligancy/fit/saturation"
	"ligancy/specs/diag"
)

// CheckFormat names the layout of check documents.
const CheckFormat = "ligancy-check/1"

// Check is what `check` found: complaints, or what a reviewer will ask.
type Check struct {
	Format       string                 `json:"format"`
	Program      Program                `json:"program"`
	Study        Study                  `json:"study"`
	Usable       bool                   `json:"usable"`
	Points       int                    `json:"points"`
	LeftOut      int                    `json:"left_out"`
	Curves       int                    `json:"curves"`
	Preparations int                    `json:"preparations"`
	Mechanisms   int                    `json:"mechanisms"`
	Complaints   diag.List              `json:"complaints"`
	Objections   []saturation.Objection `json:"objections"`
}

// NewCheck assembles the document of a check; the analysis is nil where the
// study cannot be used.
func NewCheck(a *saturation.Analysis, src Source, complaints diag.List, objections []saturation.Objection) *Check {
	c := &Check{Format: CheckFormat, Program: Program{Version: src.Version},
		Study:      Study{File: src.File, SHA256: src.SHA256},
		Complaints: list(complaints), Objections: list(objections)}
	if a == nil {
		return c
	}
	c.Usable, c.Study.Title, c.Study.Origin = true, a.Title, a.Origin
	for i := range a.Data {
		d := describe(&a.Data[i], nil)
		c.Points, c.LeftOut = c.Points+d.Points, c.LeftOut+d.LeftOut
	}
	c.Curves, c.Preparations, c.Mechanisms = len(measuredCurves(a)), preparations(a), len(a.Candidates)
	return c
}

// WriteText says that the study can be used, what it holds, and what a
// reviewer will ask.
func (c *Check) WriteText(w io.Writer, name string, colour bool) error {
	holds := []string{number(c.Points, "point")}
	if c.LeftOut > 0 {
		holds = append(holds, fmt.Sprintf("%d left out", c.LeftOut))
	}
	holds = append(holds, number(c.Curves, "curve"))
	if c.Preparations > 0 {
		holds = append(holds, number(c.Preparations, "preparation"))
	}
	holds = append(holds, number(c.Mechanisms, "mechanism"))
	line := fmt.Sprintf("%s can be used: %s. Nothing was written.", name, strings.Join(holds, ", "))
	if _, err := io.WriteString(w, hanging("", line, Width)); err != nil {
		return err
	}
	if len(c.Complaints) > 0 {
		if _, err := io.WriteString(w, "\n"); err != nil {
			return err
		}
		if err := diag.WriteText(w, c.Complaints); err != nil {
			return err
		}
	}
	if len(c.Objections) == 0 {
		return nil
	}
	if _, err := io.WriteString(w, "\n"); err != nil {
		return err
	}
	return WriteObjections(w, c.Objections, colour)
}

// Holds says whether the study passes a strict check: no warning, and nothing
// to settle first.
func (c *Check) Holds() bool {
	for i := range c.Objections {
		if c.Objections[i].Group == objectionGroups[0] {
			return false
		}
	}
	return len(c.Complaints) == 0
}
