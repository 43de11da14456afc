package saturation

import (
	"slices"
	"strconv"
	"strings"
)

// Words of `differs` that are not factors.
const (
	byPreparation = "preparation"
	byData        = "data"
)

// level says which value of one key ("pH", "preparation", "data", an effector)
// holds for a point; ok is false where the key means nothing to the data set.
func (a *Analysis) level(d *Dataset, p *Point, key string) (string, bool) {
	switch key {
	case byPreparation:
		return p.Preparation, true
	case byData:
		return d.Name, true
	}
	if j := slices.Index(d.Factors, key); j >= 0 && j < len(p.Levels) {
		return p.Levels[j], true
	}
	for j, e := range a.Effectors {
		if (e.Name == key || e.Symbol == key) && j < len(p.Effectors) {
			return number(p.Effectors[j]), true
		}
	}
	return "", false
}

// levels lists the values of a key over all kept points, in order of appearance.
func (a *Analysis) levels(key string) []string {
	var all []string
	for i := range a.Data {
		d := &a.Data[i]
		for j := range d.Points {
			p := &d.Points[j]
			if p.LeftOut != "" {
				continue
			}
			if l, ok := a.level(d, p, key); ok && !slices.Contains(all, l) {
				all = append(all, l)
			}
		}
	}
	return all
}

// label writes one level as results print it: "pH 7.0", "preparation A",
// "alanine 5 mM", and the bare name for data sets.
func (a *Analysis) label(key, level string) string {
	if key == byData {
		return level
	}
	for _, e := range a.Effectors {
		if e.Name == key || e.Symbol == key {
			return strings.TrimSpace(e.Name + " " + level + " " + e.Unit)
		}
	}
	return key + " " + level
}

// number writes a concentration as briefly as it can be written.
func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// joinLabels writes several levels as one curve name; none is "all".
func joinLabels(parts []string) string {
	if len(parts) == 0 {
		return "all"
	}
	return strings.Join(parts, ", ")
}

// replaceLabel exchanges one level among joined levels; "" if it is not there.
func replaceLabel(label, from, to string) string {
	parts := strings.Split(label, ", ")
	i := slices.Index(parts, from)
	if i < 0 {
		return ""
	}
	parts[i] = to
	return joinLabels(parts)
}
