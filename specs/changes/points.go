package changes

import (
	"fmt"
	"slices"
	"strings"

	"ligancy/fit/saturation"
)

// Points compares the measurements of two analyses, data set by data set, by
// what was measured, not by their rows. A data set of one alone is left to Written.
func Points(old, now *saturation.Analysis) []Difference {
	all := []Difference{}
	for i := range old.Data {
		for j := range now.Data {
			if old.Data[i].Name != now.Data[j].Name {
				continue
			}
			if s := compare(old.Data[i].Points, now.Data[j].Points); s != "" {
				all = append(all, Difference{About: Measured, Where: now.Data[j].Name + ": points",
					Old: held(old.Data[i].Points), New: held(now.Data[j].Points) + ": " + s})
			}
		}
	}
	return all
}

// held counts the points that are used, and those left out.
func held(points []saturation.Point) string {
	out := 0
	for i := range points {
		if points[i].LeftOut != "" {
			out++
		}
	}
	if out == 0 {
		return fmt.Sprint(len(points))
	}
	return fmt.Sprintf("%d, %d left out", len(points)-out, out)
}

// sample is where a point was measured; point is what was measured there.
func sample(p *saturation.Point) string {
	return fmt.Sprintln(p.X, p.Preparation, p.Levels, p.Effectors, p.Blocked, p.Seconds)
}

func point(p *saturation.Point) string {
	return fmt.Sprintln(sample(p), p.Y, p.Sigma, p.Weight)
}

// compare counts what came, went, changed its value, or is left out.
func compare(old, now []saturation.Point) string {
	gone, came, paired := match(refs(old), refs(now), point)
	var leftOut, backIn int
	var reasons []string
	for _, p := range paired {
		switch was, is := p[0].LeftOut, p[1].LeftOut; {
		case was == "" && is != "":
			leftOut++
			if !slices.Contains(reasons, is) {
				reasons = append(reasons, is)
			}
		case was != "" && is == "":
			backIn++
		}
	}
	gone, came, changed := match(gone, came, sample)
	var parts []string
	add := func(n int, words string) {
		if n > 0 {
			parts = append(parts, fmt.Sprintf("%d %s", n, words))
		}
	}
	add(len(came), "added")
	add(len(gone), "removed")
	add(len(changed), "with another value")
	if leftOut > 0 {
		add(leftOut, "newly left out ("+strings.Join(reasons, "; ")+")")
	}
	add(backIn, "no longer left out")
	return strings.Join(parts, ", ")
}

func refs(points []saturation.Point) []*saturation.Point {
	all := make([]*saturation.Point, len(points))
	for i := range points {
		all[i] = &points[i]
	}
	return all
}

// match pairs points of two lists that are alike, in order, and returns the rest.
func match(old, now []*saturation.Point, alike func(*saturation.Point) string) (gone, came []*saturation.Point, paired [][2]*saturation.Point) {
	waiting := map[string][]*saturation.Point{}
	for _, p := range old {
		k := alike(p)
		waiting[k] = append(waiting[k], p)
	}
	for _, p := range now {
		k := alike(p)
		if w := waiting[k]; len(w) > 0 {
			paired, waiting[k] = append(paired, [2]*saturation.Point{w[0], p}), w[1:]
			continue
		}
		came = append(came, p)
	}
	for _, p := range old {
		k := alike(p)
		if w := waiting[k]; len(w) > 0 && w[0] == p {
			gone, waiting[k] = append(gone, p), w[1:]
		}
	}
	return gone, came, paired
}
