package fittest

import (
	"context"
	"fmt"
	"testing"
)

func TestCertified(t *testing.T) {
	rows := Certify(context.Background(), "ligancy", Default)
	for i := range rows {
		r := &rows[i]
		if testing.Verbose() || !r.Right() {
			t.Logf("%-9s %d %-30s evals %4d ms %7.3f rss %.10g digits %5.2f sd %5.2f rss %5.2f hp %5.2f off %.2g", r.Dataset, r.Start, r.Status, r.Evals, r.Millis, r.RSS, r.Digits, r.DeviationDigits, r.RSSDigits, r.PolishedDigits, r.Offset)
		}
	}
	t.Logf("%+v", Summarise(rows))
}

func TestMoved(t *testing.T) {
	right, wrong := Moved(context.Background(), Default, 20)
	count := map[string]int{}
	for _, r := range wrong {
		count[fmt.Sprint(r.Dataset, r.Start, r.Status, r.Digits > 3)]++
	}
	t.Logf("%d %v", right, count)
}
