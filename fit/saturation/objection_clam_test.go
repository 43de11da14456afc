package saturation

import (
	"context"
	"testing"
	"time"
)

func TestObjectionsPrintClam(t *testing.T) {
	a := clamStudy(t)
	t0 := time.Now()
	list := a.Objections(context.Background())
	t.Log(time.Since(t0), len(list))
	out, err := a.Run(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	for _, o := range out.Objections {
		t.Log(o.Group, "|", o.ID, "|", o.Text, "|", deref(o.Effect), "|", deref(o.Remedy))
	}
	for _, o := range out.Explanations {
		t.Log(o.Slope, o.Curve, "|", o.Explanation, "|", o.Standing, deref(o.TwinOf), deref(o.Mechanism),
			float64(o.AICcBehind), "|", deref(o.Why), "|", float64(o.Value), deref(o.Test))
	}
	t.Log(out.Verdict.Text)
}
