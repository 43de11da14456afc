package changes

import (
	"fmt"

	"ligancy/specs/record"
)

// Records says what two records tell of how their studies differ.
func Records(old, now *record.Record, c *record.Comparison) []Difference {
	all := []Difference{}
	differ := func(about, where, was, is string) {
		if was != is {
			all = append(all, Difference{about, where, was, is})
		}
	}
	differ(Measured, "title", old.Title, now.Title)
	differ(Measured, "origin", old.Origin, now.Origin)
	sets := map[string]*record.Data{}
	for i := range old.Data {
		sets[old.Data[i].Name] = &old.Data[i]
	}
	for i := range now.Data {
		d := &now.Data[i]
		was := sets[d.Name]
		delete(sets, d.Name)
		if was == nil {
			differ(Measured, d.Name, "", pointsOf(d))
			continue
		}
		differ(Measured, d.Name+": file", was.File, d.File)
		if was.SHA256 != d.SHA256 {
			all = append(all, Difference{Measured, d.Name, pointsOf(was), pointsOf(d) + ", in a changed table"})
		} else {
			differ(Measured, d.Name, pointsOf(was), pointsOf(d))
		}
	}
	for i := range old.Data {
		if d := &old.Data[i]; sets[d.Name] == d {
			differ(Measured, d.Name, pointsOf(d), "")
		}
	}
	all = append(all, tried(c)...)
	for _, s := range c.Settings {
		differ(Fitted, s.What, s.Old, s.New)
	}
	return all
}

func pointsOf(d *record.Data) string {
	if d.LeftOut > 0 {
		return fmt.Sprintf("%d points, %d left out", d.Points, d.LeftOut)
	}
	return fmt.Sprintf("%d points", d.Points)
}

// tried are the mechanisms of one record alone, and those that became another.
func tried(c *record.Comparison) []Difference {
	var all []Difference
	for _, m := range c.Mechanisms {
		switch {
		case m.Old == nil:
			all = append(all, Difference{Mechanisms, m.Name, "", kind(m.New)})
		case m.New == nil:
			all = append(all, Difference{Mechanisms, m.Name, kind(m.Old), ""})
		case kind(m.Old) != kind(m.New):
			all = append(all, Difference{Mechanisms, m.Name, kind(m.Old), kind(m.New)})
		}
	}
	return all
}

func kind(m *record.Mechanism) string {
	if m.Sites > 0 {
		return fmt.Sprintf("%s, %d sites", m.Family, m.Sites)
	}
	return m.Family
}
