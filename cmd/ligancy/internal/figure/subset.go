package figure

import (
	"encoding/binary"
	"maps"
	"slices"
)

// outlines is a TrueType file taken apart, so that portable documents can
// embed the glyphs they use and no others.
type outlines struct {
	tables map[string][]byte
	start  []uint32 // of each glyph in glyf, and the end of the last
}

// parseOutlines reads the directory of a TrueType file and its table of glyph places.
func parseOutlines(ttf []byte) *outlines {
	o := &outlines{tables: map[string][]byte{}}
	for i := range int(binary.BigEndian.Uint16(ttf[4:])) {
		r := ttf[12+16*i:]
		at, size := binary.BigEndian.Uint32(r[8:]), binary.BigEndian.Uint32(r[12:])
		o.tables[string(r[:4])] = ttf[at : at+size]
	}
	loca := o.tables["loca"]
	if binary.BigEndian.Uint16(o.tables["head"][50:]) == 0 {
		for i := 0; i < len(loca); i += 2 {
			o.start = append(o.start, 2*uint32(binary.BigEndian.Uint16(loca[i:])))
		}
	} else {
		for i := 0; i < len(loca); i += 4 {
			o.start = append(o.start, binary.BigEndian.Uint32(loca[i:]))
		}
	}
	return o
}

// glyph is the description of one glyph; empty for a blank.
func (o *outlines) glyph(g int) []byte { return o.tables["glyf"][o.start[g]:o.start[g+1]] }

// Flags of a component of a composite glyph (OpenType, table glyf).
const (
	argsAreWords   = 0x0001
	hasScale       = 0x0008
	moreComponents = 0x0020
	hasXYScale     = 0x0040
	hasTwoByTwo    = 0x0080
)

// components lists the glyphs that a composite glyph is made of.
func components(g []byte) []int {
	if len(g) < 10 || int16(binary.BigEndian.Uint16(g)) >= 0 {
		return nil
	}
	var parts []int
	for at := 10; at+4 <= len(g); {
		flags := binary.BigEndian.Uint16(g[at:])
		parts = append(parts, int(binary.BigEndian.Uint16(g[at+2:])))
		at += 6
		if flags&argsAreWords != 0 {
			at += 2
		}
		switch {
		case flags&hasScale != 0:
			at += 2
		case flags&hasXYScale != 0:
			at += 4
		case flags&hasTwoByTwo != 0:
			at += 8
		}
		if flags&moreComponents == 0 {
			break
		}
	}
	return parts
}

// subset is a TrueType file with the outlines of some glyphs, which keep their
// numbers; all others are blank. It has the tables that a PDF viewer reads
// (ISO 32000-1, 9.9) and no others.
func (o *outlines) subset(used []int) []byte { return assemble(o.reduced(used)) }

// reduced are the tables of a subset.
func (o *outlines) reduced(used []int) map[string][]byte {
	keep := map[int]bool{0: true}
	for todo := slices.Clone(used); len(todo) > 0; {
		g := todo[len(todo)-1]
		todo = todo[:len(todo)-1]
		if !keep[g] {
			keep[g] = true
			todo = append(todo, components(o.glyph(g))...)
		}
	}
	var glyf, loca []byte
	for g := range len(o.start) - 1 {
		loca = binary.BigEndian.AppendUint32(loca, uint32(len(glyf)))
		if keep[g] {
			glyf = append(glyf, o.glyph(g)...)
			for len(glyf)%4 != 0 {
				glyf = append(glyf, 0)
			}
		}
	}
	loca = binary.BigEndian.AppendUint32(loca, uint32(len(glyf)))
	head := slices.Clone(o.tables["head"])
	binary.BigEndian.PutUint16(head[50:], 1) // long places
	binary.BigEndian.PutUint32(head[8:], 0)
	return map[string][]byte{
		"glyf": glyf, "loca": loca, "head": head,
		"hhea": o.tables["hhea"], "hmtx": o.tables["hmtx"], "maxp": o.tables["maxp"],
	}
}

// webFont is a subset that a browser takes: with names and with the way from
// letters to glyphs. A letter that the face lacks is left to another typeface.
func webFont(f Face, letters map[rune]bool) []byte {
	o := parsedOutlines[f]()
	glyphs := map[rune]int{}
	var used []int
	for _, r := range slices.Sorted(maps.Keys(letters)) {
		if g := f.glyph(r); g > 0 {
			glyphs[r] = g
			used = append(used, g)
		}
	}
	tables := o.reduced(used)
	for _, name := range []string{"OS/2", "name", "post"} {
		tables[name] = o.tables[name]
	}
	tables["cmap"] = letterMap(glyphs)
	return assemble(tables)
}

// letterMap is a cmap table of format 12, a group a letter.
func letterMap(glyphs map[rune]int) []byte {
	out := []byte{0, 0, 0, 1, 0, 3, 0, 10, 0, 0, 0, 12} // version, one table: Windows, all of Unicode
	out = append(out, 0, 12, 0, 0)
	out = binary.BigEndian.AppendUint32(out, uint32(16+12*len(glyphs)))
	out = append(out, 0, 0, 0, 0)
	out = binary.BigEndian.AppendUint32(out, uint32(len(glyphs)))
	for _, r := range slices.Sorted(maps.Keys(glyphs)) {
		out = binary.BigEndian.AppendUint32(out, uint32(r))
		out = binary.BigEndian.AppendUint32(out, uint32(r))
		out = binary.BigEndian.AppendUint32(out, uint32(glyphs[r]))
	}
	return out
}

// assemble writes a TrueType file.
func assemble(tables map[string][]byte) []byte {
	names := make([]string, 0, len(tables))
	for n := range tables {
		names = append(names, n)
	}
	slices.Sort(names)
	n := len(names)
	log := 0
	for 2<<log <= n {
		log++
	}
	out := []byte{0, 1, 0, 0}
	out = binary.BigEndian.AppendUint16(out, uint16(n))
	out = binary.BigEndian.AppendUint16(out, uint16(16<<log))
	out = binary.BigEndian.AppendUint16(out, uint16(log))
	out = binary.BigEndian.AppendUint16(out, uint16(16*n-16<<log))
	at := 12 + 16*n
	for _, name := range names {
		t := tables[name]
		out = append(out, name...)
		out = binary.BigEndian.AppendUint32(out, checksum(t))
		out = binary.BigEndian.AppendUint32(out, uint32(at))
		out = binary.BigEndian.AppendUint32(out, uint32(len(t)))
		at += (len(t) + 3) &^ 3
	}
	for _, name := range names {
		out = append(out, tables[name]...)
		for len(out)%4 != 0 {
			out = append(out, 0)
		}
	}
	return out
}

// checksum of a table: the sum of its 32-bit words.
func checksum(t []byte) uint32 {
	var sum uint32
	for i := 0; i < len(t); i += 4 {
		var word [4]byte
		copy(word[:], t[i:])
		sum += binary.BigEndian.Uint32(word[:])
	}
	return sum
}
