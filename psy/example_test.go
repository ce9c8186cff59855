package psy_test

import (
	"fmt"
	"math"

	"dewledger/psy"
)

// The whole state from what a room sensor says.
func ExampleModel_Find() {
	air := psy.Model{P: 101325}
	s, err := air.Find(psy.DryBulb, 24, psy.RelHumidity, 0.5)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.2f g/kg, %.1f kJ/kg, dew point %.1f degC, wet bulb %.1f degC, %.3f m³/kg\n",
		1e3*s.W, s.Enthalpy, s.DewPoint, s.WetBulb, s.Volume)
	// Output: 9.34 g/kg, 47.9 kJ/kg, dew point 12.9 degC, wet bulb 17.1 degC, 0.854 m³/kg
}

// A pair that fixes nothing, and air that cannot be, say so.
func ExampleModel_Find_impossible() {
	air := psy.Model{P: 101325}
	_, err := air.Find(psy.DewPoint, 12, psy.HumRatio, 0.009)
	fmt.Println(err)
	_, err = air.Find(psy.DryBulb, 20, psy.WetBulb, 22)
	fmt.Println(err)
	// Output:
	// psy: dew point and humidity ratio do not fix a state: give two properties of which neither follows from the other
	// psy: no moist air from -60 to 90 degC at 101325 Pa has dry bulb 20 and wet bulb 22
}

// Where does a duct at 14 degC begin to sweat in a humid cellar?
func ExampleModel_DewPoint() {
	air := psy.Model{P: psy.PressureAtAltitude(450)}
	w := air.HumRatio(22, 0.65)
	fmt.Printf("dew point %.1f degC\n", air.DewPoint(w))
	// Output: dew point 15.1 degC
}

// A sling psychrometer's two readings as relative humidity.
func ExampleModel_HumRatioWetBulb() {
	air := psy.Model{P: 101325}
	w := air.HumRatioWetBulb(30, 20)
	fmt.Printf("%.0f %%\n", 100*air.RelHumidity(30, w))
	// Output: 40 %
}

// In a heating coil the humidity ratio stays and the relative humidity falls.
func ExampleModel_RelHumidity() {
	air := psy.Model{P: 101325}
	w := air.HumRatio(5, 0.8)
	fmt.Printf("%.1f g/kg: 80 %% at 5 degC, %.0f %% at 20 degC\n", 1e3*w, 100*air.RelHumidity(20, w))
	// Output: 4.3 g/kg: 80 % at 5 degC, 30 % at 20 degC
}

// The duty of a cooling coil, with its condensate.
func ExampleWaterEnthalpy() {
	air := psy.Model{P: 101325}
	w1, w2 := air.HumRatio(27, 0.5), air.HumRatio(13, 0.95)
	dry := 2.0 / air.Volume(13, w2) // 2 m³/s leave the coil
	total := dry * (air.Enthalpy(27, w1) - air.Enthalpy(13, w2) - (w1-w2)*psy.WaterEnthalpy(13))
	fmt.Printf("%.1f kW, %.1f litres of water an hour\n", total, 3600*dry*(w1-w2))
	// Output: 48.8 kW, 20.1 litres of water an hour
}

// Two streams mix on the straight line in humidity ratio and enthalpy.
func ExampleModel_Temp() {
	air := psy.Model{P: 101325}
	w := 0.3*air.HumRatio(-5, 0.7) + 0.7*air.HumRatio(22, 0.4)
	h := 0.3*air.Enthalpy(-5, air.HumRatio(-5, 0.7)) + 0.7*air.Enthalpy(22, air.HumRatio(22, 0.4))
	t := air.Temp(h, w)
	fmt.Printf("%.1f degC, %.0f %%\n", t, 100*air.RelHumidity(t, w))
	// Output: 14.0 degC, 52 %
}

// The uncertainty of a humidity ratio from those of its sensors, to first order.
func ExampleModel_HumRatioPartials() {
	air := psy.Model{P: 101325}
	const uT, uRH = 0.29, 0.017 // standard uncertainties of 0.5 K and 3 % as limits
	w, dt, drh, _ := air.HumRatioPartials(22, 0.45)
	fmt.Printf("%.2f ± %.2f g/kg (k = 2)\n", 1e3*w, 2e3*math.Hypot(dt*uT, drh*uRH))
	// Output: 7.42 ± 0.63 g/kg (k = 2)
}

// Sensors report relative humidity over liquid water at all temperatures; over ice
// the same air has more.
func ExampleModel_ice() {
	w := psy.Model{P: 101325}.HumRatio(-15, 0.7)
	fmt.Printf("%.0f %% over ice\n", 100*psy.Model{P: 101325, Ice: true}.RelHumidity(-15, w))
	// Output: 81 % over ice
}

// A month of readings at once, several times faster than one by one.
func ExampleModel_HumRatiosEnthalpies() {
	air := psy.Model{P: 101325}
	t, rh := []float64{18, 20, math.NaN()}, []float64{0.5, 0.45, 0.5}
	w, h := make([]float64, 3), make([]float64, 3)
	air.HumRatiosEnthalpies(w, h, t, rh)
	fmt.Printf("%.4f kg/kg, %.1f kJ/kg\n", w, h)
	// Output: [0.0064 0.0066 NaN] kg/kg, [34.4 36.7 NaN] kJ/kg
}
