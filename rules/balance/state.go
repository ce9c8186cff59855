package balance

// State is what the unit was doing in an interval.
type State uint8

// The operating states (physics: which components the controls have asked for).
const (
	Unknown            State = iota
	Off                      // fan off
	Heating                  // a heating or preheat coil commanded on
	FreeCooling              // damper above minimum, coils shut
	FreePlusMechanical       // damper above minimum, cooling on
	Mechanical               // damper at minimum, cooling on
	Ventilating              // fan on, coils shut, damper at minimum
	Recirculating            // fan on, damper shut
	HeatingAndCooling        // both commanded on
	NumStates
)

var stateNames = [NumStates]string{
	"unknown", "off", "heating", "free-cooling", "free-plus-mechanical", "mechanical",
	"ventilating", "recirculating", "heating-and-cooling",
}

// String is the state's name.
func (s State) String() string { return stateNames[s] }
