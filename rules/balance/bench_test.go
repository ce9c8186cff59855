package balance

import "testing"

// BenchmarkBooks strikes every balance of a month at 5 min with humidity at four
// stations, from nothing.
func BenchmarkBooks(bench *testing.B) {
	u := standard(28*288, 0.3).u
	bench.ReportAllocs()
	for bench.Loop() {
		b := Keep(u)
		for _, d := range Defs() {
			b.Get(d)
		}
	}
	bench.ReportMetric(float64(bench.Elapsed().Nanoseconds())/float64(bench.N)/float64(u.Axis.N), "ns/interval")
}

// Nothing is allocated interval by interval: twice as many take as many
// allocations.
func TestNoAllocationPerInterval(t *testing.T) {
	count := func(n int) float64 {
		u := standard(n, 0.3).u
		return testing.AllocsPerRun(3, func() {
			b := Keep(u)
			for _, d := range Defs() {
				b.Get(d)
			}
		})
	}
	short, long := count(4000), count(8000)
	if long > short+5 { // the runtime's own, now and then
		t.Errorf("%v allocations for 4000 intervals, %v for 8000", short, long)
	}
}
