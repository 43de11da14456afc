package specs

import "ligancy/specs/units"

func isNumber(s string) bool {
	_, err := units.ParseNumber(s)
	return err == nil
}
