package synth

import (
	"fmt"
	"math"
	"math/rand/v2"
	"time"

	"dewledger/psy"
)

// Climate is a type of climate. Its figures are invented, typical of the type,
// and those of no place.
type Climate uint8

// The climates, all of the northern hemisphere.
const (
	Marine Climate = iota
	Continental
	HumidSubtropical
	HotDry
	Cold
	numClimates
)

type climate struct {
	name      string
	temp      [12]float64 // monthly mean, degC
	dew       [12]float64 // monthly mean dew point, degC
	day       float64     // half the mean daily range, K
	synoptic  float64     // standard deviation of what fronts do to the temperature, K
	dewSpread float64     // and of the dew point beside that, K
}

var climates = [numClimates]climate{
	Marine:           {"marine", [12]float64{4, 4.5, 7, 9.5, 13, 16, 18, 18, 15, 11, 7, 4.5}, [12]float64{2, 2, 3, 4.5, 8, 11, 12.5, 12.5, 11, 8, 4.5, 2.5}, 3.5, 2.8, 1.6},
	Continental:      {"continental", [12]float64{-4, -2, 4, 10.5, 16.5, 21.5, 24, 23, 18.5, 12, 5, -1.5}, [12]float64{-8, -7, -2, 3.5, 9.5, 15, 17.5, 17, 12.5, 6, 0, -5}, 5.2, 4.6, 2.6},
	HumidSubtropical: {"humid-subtropical", [12]float64{8, 10, 14, 18.5, 23, 26.5, 28, 27.5, 25, 19, 13.5, 9}, [12]float64{3, 4.5, 8.5, 13, 18, 22, 23.5, 23, 20, 13.5, 8, 4}, 5.0, 3.2, 2.2},
	HotDry:           {"hot-dry", [12]float64{12, 14, 17.5, 22, 27, 32, 35, 34, 30.5, 24, 17, 12.5}, [12]float64{0, 0.5, 1, 1, 2, 4, 11, 12, 8, 4, 1, 0}, 7.0, 2.6, 3.0},
	Cold:             {"cold", [12]float64{-14, -11, -4, 4, 12, 17, 20, 18.5, 13, 5.5, -3, -11}, [12]float64{-18, -16, -9, -2, 4.5, 10.5, 13.5, 13, 8, 1, -6, -15}, 5.0, 5.5, 2.8},
}

// String is the climate's name.
func (c Climate) String() string {
	if c >= numClimates {
		return fmt.Sprintf("climate(%d)", uint8(c))
	}
	return climates[c].name
}

// Climates lists the climates.
func Climates() []Climate {
	var out []Climate
	for c := range numClimates {
		out = append(out, c)
	}
	return out
}

// ar is a first-order autoregressive process of unit variance, whose value a
// time dt later correlates with exp(-dt/tau).
type ar struct {
	x, keep, add float64
	rng          *rand.Rand
}

func newAR(rng *rand.Rand, dt, tau time.Duration) *ar {
	keep := math.Exp(-float64(dt) / float64(tau))
	return &ar{x: rng.NormFloat64(), keep: keep, add: math.Sqrt(1 - keep*keep), rng: rng}
}

func (a *ar) next() float64 {
	a.x = a.keep*a.x + a.add*a.rng.NormFloat64()
	return a.x
}

// stream is an independent source of chance for one purpose.
func stream(seed, purpose uint64) *rand.Rand {
	return rand.New(rand.NewPCG(seed, purpose*0x9e3779b97f4a7c15+1))
}

// The purposes of chance that are not roles.
const (
	forWeather = 1000 + iota
	forClouds
	forZone
	forPlant
	forNights
	forOffsets = 2000 // and the role
)

// weather fills in outdoor temperature and humidity ratio. A month's mean is
// read at its middle and runs straight to the next; fronts and clouds come and
// go about it. Dew never passes 99.5 % RH.
func weather(c Climate, seed uint64, start time.Time, zone *time.Location, step time.Duration, air psy.Model, temp, w []float64) {
	k := &climates[c]
	rng := stream(seed, forWeather)
	front := newAR(rng, step, 36*time.Hour)
	humid := newAR(rng, step, 30*time.Hour)
	gust := newAR(rng, step, 40*time.Minute)
	clouds := newAR(stream(seed, forClouds), step, 20*time.Hour)
	for i := range temp {
		t := start.Add(time.Duration(i) * step).In(zone)
		// The warmest hour is about three in the afternoon, the coldest near dawn:
		// a cosine with some of its second harmonic.
		hour := float64(t.Hour()) + float64(t.Minute())/60
		x := 2 * math.Pi * (hour - 15) / 24
		clear := 0.75 + 0.35*math.Tanh(clouds.next())
		day := (math.Cos(x) + 0.15*math.Cos(2*x)) * clear
		f := front.next()
		temp[i] = monthly(&k.temp, t) + k.synoptic*f + k.day*day + 0.25*gust.next()
		dew := monthly(&k.dew, t) + 0.75*k.synoptic*f + k.dewSpread*humid.next()
		w[i] = math.Min(air.HumRatioDewPoint(dew), air.HumRatio(temp[i], 0.995))
	}
}

func monthly(m *[12]float64, t time.Time) float64 {
	x := float64(t.YearDay()-1)/365.25*12 - 0.5
	if x < 0 {
		x += 12
	}
	i := int(x)
	f := x - float64(i)
	return m[i%12]*(1-f) + m[(i+1)%12]*f
}
