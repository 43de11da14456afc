package report

import (
	"bytes"
	"fmt"
	"strconv"
	"sync"

	"ligancy/cmd/ligancy/internal/figure"
)

// FigureFile is one figure in one format.
type FigureFile struct {
	Name    string // "curves-85mm.svg"
	Content []byte
}

// Figures draws every figure of a result for print: as SVG and as PDF, one
// column (85 mm) and two columns (174 mm) wide, always on white.
func Figures(d *Document) ([]FigureFile, error) {
	v := newView(d)
	type named struct {
		name   string
		figure figure.Figure
	}
	var all []named
	add := func(name string, f figure.Figure) {
		if f != nil {
			all = append(all, named{name, f})
		}
	}
	for i, f := range v.curvesFigures() {
		add("curves"+suffix(i), f)
	}
	add("steepness", v.slopeFigure())
	add("standing", v.standingFigure())
	add("constants", v.strips())
	add("states", v.populations())
	add("hill-plot", v.hillPlot())
	formats := []struct {
		style figure.Style
		mm    int
	}{{figure.SingleColumn, 85}, {figure.DoubleColumn, 174}}
	files := make([]FigureFile, 2*len(formats)*len(all))
	errs := make([]error, len(files))
	var wg sync.WaitGroup
	for i, n := range all {
		for k, format := range formats {
			wg.Go(func() {
				drawing := n.figure.Draw(format.style)
				at := 2 * (i*len(formats) + k)
				name := n.name + "-" + strconv.Itoa(format.mm) + "mm"
				var svg, pdf bytes.Buffer
				errs[at] = drawing.WriteSVGFile(&svg)
				errs[at+1] = drawing.WritePDF(&pdf)
				files[at] = FigureFile{name + ".svg", svg.Bytes()}
				files[at+1] = FigureFile{name + ".pdf", pdf.Bytes()}
			})
		}
	}
	wg.Wait()
	for i, err := range errs {
		if err != nil {
			return nil, fmt.Errorf("figure %s: %w", files[i].Name, err)
		}
	}
	return files, nil
}
