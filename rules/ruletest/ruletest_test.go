package ruletest

import (
	"testing"

	"dewledger/rules"
)

func TestCases(t *testing.T) {
	for _, r := range rules.All() {
		t.Run(r.Name, func(t *testing.T) {
			t.Parallel()
			Cases(t, r)
		})
	}
}
