package specs

import (
	"regexp"
	"strings"

	"ligancy/specs/units"
)

// unitWords are units as headers write them, where a unit's own writing cannot
// stand: conc_ng_per_ml, percent.
var unitWords = map[string]string{
	"ng_per_ml": "ng/mL", "ug_per_ml": "ug/mL", "mg_per_ml": "mg/mL", "pg_per_ml": "pg/mL",
	"nkat_mg": "nkat/mg", "U_mg": "U/mg", "fmol_mg": "fmol/mg", "pmol_mg": "pmol/mg",
	"nmol_mg": "nmol/mg",
	"umol_L":  "umol/L", "nmol_L": "nmol/L", "mmol_L": "mmol/L", "pmol_L": "pmol/L",
	"mg_mL": "mg/mL", "ng_mL": "ng/mL", "ug_mL": "ug/mL",
	"pct": "percent", "perc": "percent", "percentage": "percent",
}

// headerUnits are units that a header's last word may be; short words that mean
// something else in headers (m, d, l, g, h, s, K, M alone as "n_M" is fine) are left out.
var headerUnits = map[string]bool{
	"M": true, "mM": true, "uM": true, "µM": true, "μM": true, "nM": true, "pM": true, "fM": true,
	"torr": true, "Torr": true, "mmHg": true, "kPa": true, "Pa": true, "hPa": true, "mbar": true,
	"bar": true, "atm": true, "ppm": true,
	"nkat": true, "kat": true, "percent": true, "fraction": true, "ms": true, "s": true,
	"min": true, "degC": true,
	"fmol": true, "pmol": true, "nmol": true, "umol": true,
}

var inBrackets = regexp.MustCompile(`^(.*?)\s*[\[(]\s*([^\])]+?)\s*[\])]\s*$`)

// unitInHeader finds the unit that a column's header names: pO2_torr, conc
// (uM), L / nM, conc_ng_per_ml, log10_M, SO2 %.
func unitInHeader(header string) (units.Unit, bool) {
	_, u, ok := splitHeader(header)
	return u, ok
}

// splitHeader parts a header into what it names and its unit.
func splitHeader(header string) (name string, u units.Unit, ok bool) {
	h := strings.TrimSpace(header)
	if m := inBrackets.FindStringSubmatch(h); m != nil && m[1] != "" {
		if u, ok := bracketUnit(m[2]); ok {
			return m[1], logarithmic(m[1], u), true
		}
	}
	if before, after, ok := strings.Cut(h, " / "); ok && before != "" {
		if u, err := units.Parse(after); err == nil {
			return before, u, true
		}
	}
	if before, ok := strings.CutSuffix(h, "%"); ok && strings.TrimSpace(before) != "" {
		return strings.TrimSpace(before), units.MustParse("percent"), true
	}
	for i := range h {
		if i == 0 || !strings.ContainsRune("_. -", rune(h[i])) {
			continue
		}
		word := h[i+1:]
		if w, ok := unitWords[word]; ok {
			return h[:i], logarithmic(h[:i], units.MustParse(w)), true
		}
		if headerUnits[word] {
			return h[:i], logarithmic(h[:i], units.MustParse(word)), true
		}
	}
	return h, units.Unit{}, false
}

var logUnit = regexp.MustCompile(`(?i)^(log10|log|lg)[ ({\[]*([a-zµμ]+)[)}\] ]*$`)

// bracketUnit reads a unit between brackets; log M is log10 M there.
func bracketUnit(s string) (units.Unit, bool) {
	if m := logUnit.FindStringSubmatch(s); m != nil {
		s = "log10 " + m[2]
	}
	u, err := units.Parse(s)
	return u, err == nil
}

// labelInHeader is what stands between brackets at the end of a header where it
// is no unit: dpm, % of max.
func labelInHeader(header string) string {
	m := inBrackets.FindStringSubmatch(strings.TrimSpace(header))
	if m == nil || len(m[2]) > 24 || oneLine(m[2]) != m[2] || isNumber(m[2]) {
		return ""
	}
	return m[2]
}

var logWord = regexp.MustCompile(`(?i)(^|[_. -])(log10|log|lg)([_. (\[-]|$)`)

// logarithmic makes log10 M of M where the header speaks of a logarithm.
func logarithmic(before string, u units.Unit) units.Unit {
	if logWord.MatchString(before) && u.Kind() != "a plain number" && !u.IsLogarithm() {
		return units.MustParse("log10 " + u.String())
	}
	return u
}
