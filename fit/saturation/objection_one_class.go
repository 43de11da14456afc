package saturation

import (
	"context"
	"fmt"
	"math"
)

const oneClassSource = "two classes of sites behind one Hill curve: computed; one class against two is " +
	"no regular test: Böhning et al. 1994 Ann Inst Stat Math 46:373, from memory"

// asksOneClass asks what unlike sites a curve like that of one site may hide.
func (r *review) asksOneClass(context.Context) {
	for di := range r.a.Data {
		if !r.binds(di) {
			continue
		}
		for _, c := range r.readings(di) {
			if c.high < 1 || c.low > 1 {
				continue // not the curve of one site
			}
			a := answer{id: "hidden-classes", group: foundGood, source: oneClassSource}
			if !(c.low > 0.3) {
				a.group = sayInPaper
				a.text = fmt.Sprintf("%sn_H%s is held from below to %s only: unlike sites of any ratio "+
					"could hide here.",
					r.where(di), r.onCurve(c), figures(math.Max(c.low, 0), 2))
				r.add(a)
				break
			}
			rho := hiddenRatio(c.low)
			_, rms := twoClassFit(rho)
			a.text = fmt.Sprintf("%sNot told from one site%s; two equal classes whose K differ up to "+
				"%s-fold would look the same (n_H down to %s; rms misfit %s).",
				r.where(di), r.onCurve(c), figures(rho, 2), figures(c.low, 3), figures(rms, 2))
			a.effect = fmt.Sprintf("Such classes have n_H %s at half saturation.",
				figures(twoClassHalf(rho), 3))
			if rho > hiddenTenfold {
				a.group = sayInPaper
				a.remedy = "more points, or less scatter, before one class is claimed"
			}
			r.add(a)
			break
		}
	}
}

// hiddenTenfold is the ratio of hidden classes from which it is to be said.
const hiddenTenfold = 10
