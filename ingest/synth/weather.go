package synth

import (
	"math"
	"math/rand/v2"
	"time"
)

// Climate is a place's weather in a few numbers: monthly means of dry bulb and
// dew point, January first, the mean half-range of a day, and the standard
// deviation of what weather systems add. Invented, each in the spirit of its name.
type Climate struct {
	Name     string
	Mean     [12]float64 // degC
	Dew      [12]float64 // degC
	Diurnal  float64     // K, half-range
	Synoptic float64     // K
}

// Climates are five invented places.
func Climates() []Climate {
	return []Climate{
		{"marine", [12]float64{5, 5.5, 7.5, 10, 13, 16, 18, 18, 15.5, 12, 8, 5.5}, [12]float64{2, 2, 3.5, 5, 8, 11, 13, 13, 11.5, 8.5, 5, 3}, 3.5, 3},
		{"continental", [12]float64{-5, -3, 3, 10, 16, 20, 23, 22, 17, 10, 3, -3}, [12]float64{-9, -7, -2, 3, 9, 14, 17, 16, 12, 5, -1, -6}, 5.5, 5},
		{"humid", [12]float64{9, 11, 15, 19, 23, 26.5, 28, 28, 25.5, 20, 14.5, 10.5}, [12]float64{4, 5.5, 9, 13, 18, 22, 23.5, 23.5, 20.5, 14, 9, 5.5}, 5, 3.5},
		{"hot-dry", [12]float64{12, 14, 18, 22, 27.5, 32.5, 35, 34, 31, 24, 17, 12.5}, [12]float64{0, 0, 0.5, 1, 3, 6, 13, 14, 9, 5, 2, 0}, 7.5, 3},
		{"cold", [12]float64{-14, -11, -4, 4, 11, 16.5, 19, 18, 12, 5, -3, -11}, [12]float64{-18, -15, -9, -3, 3, 10, 13.5, 12.5, 7, 0, -7, -15}, 5, 6},
	}
}

// ClimateNamed is the climate of that name; it panics for an unknown one.
func ClimateNamed(name string) Climate {
	for _, c := range Climates() {
		if c.Name == name {
			return c
		}
	}
	panic("synth: no climate " + name)
}

// monthly interpolates monthly means, each in the middle of its month.
func monthly(v *[12]float64, t time.Time) float64 {
	days := float64(time.Date(t.Year(), t.Month()+1, 0, 0, 0, 0, 0, time.UTC).Day())
	x := float64(t.Month()-1) + (float64(t.Day())-1+float64(t.Hour())/24)/days - 0.5
	i := int(math.Floor(x))
	f := x - float64(i)
	return v[(i+12)%12]*(1-f) + v[(i+13)%12]*f
}

// wander is a first-order random process with a time constant.
type wander struct {
	x, sd, tau float64 // tau in hours
	rng        *rand.Rand
}

func newWander(rng *rand.Rand, sd, tau float64) *wander {
	return &wander{x: sd * rng.NormFloat64(), sd: sd, tau: tau, rng: rng}
}

func (w *wander) next(hours float64) float64 {
	a := math.Exp(-hours / w.tau)
	w.x = a*w.x + w.sd*math.Sqrt(1-a*a)*w.rng.NormFloat64()
	return w.x
}

// weather gives outdoor dry bulb and dew point, degC, step by step.
type weather struct {
	c                    Climate
	systems, gusts, damp *wander
	cloud                *wander
}

func newWeather(c Climate, rng *rand.Rand) *weather {
	return &weather{c: c, systems: newWander(rng, c.Synoptic, 60), gusts: newWander(rng, 0.35, 0.7),
		damp: newWander(rng, 2.2, 40), cloud: newWander(rng, 1, 20)}
}

func (w *weather) next(local time.Time, hours float64) (t, td float64) {
	hour := float64(local.Hour()) + float64(local.Minute())/60
	amp := w.c.Diurnal * (1 + 0.35*math.Tanh(w.cloud.next(hours)))
	s := w.systems.next(hours)
	t = monthly(&w.c.Mean, local) + s + amp*math.Cos(2*math.Pi*(hour-15)/24) + w.gusts.next(hours)
	td = monthly(&w.c.Dew, local) + 0.6*s + w.damp.next(hours)
	// Saturation is where dew point meets dry bulb; weather stops a little short.
	return t, math.Min(td, t-0.15)
}
