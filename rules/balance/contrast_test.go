package balance

import (
	"math"
	"testing"

	"dewledger/ingest/trend"
)

// An offset that is the same in both sets cancels; what differs stays.
func TestContrast(t *testing.T) {
	const n = 400
	s := &Series{Name: "x", Unit: "g/kg", Val: make([]float64, n), Off: make([]float64, n), Noise: make([]float64, n),
		Terms: []Term{{Role: trend.SARH, G: make([]float64, n)}, {Role: trend.RARH, G: make([]float64, n)}}}
	high, low := make([]bool, n), make([]bool, n)
	for i := range n {
		high[i], low[i] = i%2 == 0, i%2 == 1
		s.Terms[0].G[i] = 0.3 // the same everywhere
		s.Val[i] = 1
		if high[i] {
			s.Val[i], s.Terms[1].G[i] = 3, 0.1
		}
		s.Off[i] = math.Hypot(s.Terms[0].G[i], s.Terms[1].G[i])
	}
	c := s.Contrast(high, low)
	if math.Abs(c.Val-2) > 1e-12 || math.Abs(c.Off-0.1) > 1e-12 {
		t.Errorf("contrast %v ± %v, want 2 ± 0.1", c.Val, c.Off)
	}
}
