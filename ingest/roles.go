package ingest

import (
	"fmt"
	"math/bits"
	"strings"
	"unicode"

	"dewledger/ingest/trend"
)

// guess is what a column's name and unit say its role is.
type guess struct {
	role   trend.Role
	score  int    // higher is surer; 0: none
	ground string // in words, also where there is no role
	open   []trend.Role
	other  bool // the name says that it is another kind of point
	pos    bool // the name says "position": command or feedback, as the others decide
}

const (
	exactScore = 100
	fullScore  = 20
	wordCost   = 3 // a word of the name that is not known
	minScore   = 14
)

// sample is what the head of a file says about the values of a column.
type sample struct {
	n        int
	lo, hi   float64
	twoState bool // nothing but 0 and 1, or words for them
	words    bool // some of them words for on and off
}

// guessRole judges a column by its name, without its unit, the unit and a
// sample of its data.
func guessRole(name, unit string, sm sample) guess {
	plain := strings.Trim(strings.ReplaceAll(strings.ReplaceAll(strings.ToLower(name), " ", "_"), "-", "_"), "_")
	if r, ok := trend.ParseRole(plain); ok && r != trend.NoRole {
		g := guess{role: r, score: exactScore, ground: "the name is the role's own"}
		return checkUnit(g, unit, sm)
	}
	tokens := tokenize(name)
	traits, unknown, read := readTokens(tokens)
	u, known := LookupUnit(unit)
	traits = disambiguate(traits, u, known, sm)
	if traits&tBlock != 0 {
		return guess{other: true, ground: "the name speaks of " + strings.Join(read, ", ")}
	}
	if traits&(tTemp|tRH|tDew|tWetBulb|tEnthalpy|tMoisture|tFlow|tVelocity|tPressure|tDP|tCO2|tDamper|tValve|tFan|tStage|tHumidifier|tEcon|tRecovery|tOccupied|tBaro) == 0 {
		if known {
			traits |= traitOfUnit(u)
		}
	}
	if known && traits&tFan != 0 && traits&(tStatus|tCommand|tSpeed|tPower|tC|tS|tFlow|tPressure|tTemp) == 0 {
		switch u.Dim { // a fan in kW is its power, in percent its speed
		case Power:
			traits |= tPower
		case Ratio:
			traits |= tSpeed
		case Flow:
			traits |= tFlow
		}
	}
	measuredPos := traits&(tPosition|tCommand|tFeedback) == tPosition || (traits&(tCommand|tFeedback|tOutput) == 0 && strings.Contains(strings.ToLower(name), "sensor"))
	best := guess{}
	for _, p := range patterns {
		if traits&p.need != p.need || traits&^(p.need|p.may) != 0 {
			continue
		}
		score := fullScore - p.cost - wordCost*unknown
		switch {
		case score > best.score:
			best = guess{role: p.role, score: score, pos: measuredPos}
		case score == best.score && p.role != best.role:
			best.open = append(best.open, p.role)
		}
	}
	switch {
	case best.score < minScore && best.role != trend.NoRole:
		return guess{open: []trend.Role{best.role}, ground: "too many words of the name are not known: " + strings.Join(read, ", ")}
	case best.role == trend.NoRole && traits == 0:
		return guess{ground: "no word of the name is known"}
	case best.role == trend.NoRole:
		return guess{ground: "the name fits no role: " + strings.Join(read, ", ")}
	case len(best.open) > 0:
		return guess{open: append([]trend.Role{best.role}, best.open...), ground: "the name fits several roles: " + strings.Join(read, ", ")}
	}
	best.ground = strings.Join(read, ", ")
	// A fan command that takes values between on and off is a speed.
	switch best.role {
	case trend.SAFanCmd, trend.RAFanCmd:
		if (known && (u.Dim == Ratio || u.Dim == Frequency)) || (sm.n > 0 && !sm.twoState && sm.hi > 1.5) {
			if best.role == trend.SAFanCmd {
				best.role = trend.SAFanSpeed
			} else {
				best.role = trend.RAFanSpeed
			}
			best.ground += "; its values are a percentage, so it is the speed"
		}
	}
	return checkUnit(best, unit, sm)
}

// checkUnit takes a guess back where the unit or the data says that it cannot be.
func checkUnit(g guess, unit string, sm sample) guess {
	u, known := LookupUnit(unit)
	if unit != "" && known {
		if _, _, ok := u.toKind(g.role.Kind()); !ok {
			return guess{open: []trend.Role{g.role}, ground: fmt.Sprintf("%s; but its unit %s is one of %v", g.ground, u.Name, u.Dim)}
		}
		g.ground += ", unit " + u.Name
	}
	lo, hi := plausible(g.role.Kind())
	if sm.n > 0 && (sm.hi < lo || sm.lo > hi) {
		return guess{open: []trend.Role{g.role}, ground: fmt.Sprintf("%s; but its values, %.4g to %.4g, cannot be that", g.ground, sm.lo, sm.hi)}
	}
	return g
}

// plausible bounds the raw values of a kind over every unit it is trended in.
// Values beyond are no such quantity, whatever the name says.
func plausible(k trend.Kind) (lo, hi float64) {
	switch k {
	case trend.Temperature, trend.DewPoint, trend.WetBulb, trend.WaterTemp:
		return -100, 320 // degF of steam-heated water; K is above 200
	case trend.RelHumidity, trend.Position:
		return -20, 200
	case trend.Switch:
		return -1, 100
	}
	return -1e7, 1e7
}

func traitOfUnit(u Measure) trait {
	switch u.Dim {
	case Temperature:
		return tTemp
	case Flow:
		return tFlow
	case Speed:
		return tVelocity
	case Pressure:
		return tPressure
	case Enthalpy:
		return tEnthalpy
	case Moisture:
		return tMoisture
	case Concentration:
		return tCO2
	}
	if f := foldUnit(u.Name); strings.Contains(f, "rh") {
		return tRH
	}
	return 0
}

// disambiguate settles the words that mean one thing here and another there.
func disambiguate(t trait, u Measure, known bool, sm sample) trait {
	const quantity = tTemp | tRH | tDew | tEnthalpy | tMoisture | tFlow | tPressure | tCO2
	if t&tSP != 0 {
		t &^= tSP
		switch {
		case t&quantity != 0:
			t |= tSetpoint
		case known && u.Dim == Pressure:
			t |= tPressure
		case known && u.Dim == Temperature:
			t |= tSetpoint | tTemp
		case known && u.Dim == Flow:
			t |= tSetpoint | tFlow
		default:
			t |= tSP
		}
	}
	if t&tH != 0 && known {
		switch u.Dim {
		case Ratio:
			t = t&^tH | tRH
		case Enthalpy:
			t = t&^tH | tEnthalpy
		}
	}
	if t&tDP != 0 && t&(tFilter|tBuilding|tPressure) == 0 { // "OA DP" in degrees is a dew point
		if known && u.Dim == Temperature {
			t = t&^tDP | tDew
		}
	}
	if t&tD != 0 {
		t &^= tD
		if t&(quantity|tFan|tValve) == 0 {
			t |= tDamper
		}
	}
	if t&tC != 0 && t&(tFan|tDamper|tValve) == 0 && t&quantity != 0 {
		t &^= tC // the C of a temperature is its unit
	}
	if t&tS != 0 && t&tFan == 0 {
		t &^= tS
		if t&(tHW|tCHW) != 0 {
			t |= tSupply
		}
	}
	if t&tOutput != 0 && t&tLeaving == 0 && t&(tValve|tDamper|tFan|tEcon|tHumidifier|tRecovery|tStage) == 0 && t&tTemp != 0 {
		t = t&^tOutput | tLeaving
	}
	if t&tPower != 0 && t&tFan != 0 {
		t &^= tSpeed
	}
	// "Cooling coil" with nothing more, in percent, is its valve or its stages:
	// left open by fitting no pattern.
	if t&tWater != 0 && t&tHW != 0 && t&tCool == 0 {
		t &^= tWater
	}
	if t&tWater != 0 && t&tCHW != 0 {
		t &^= tWater
	}
	return t
}

// tokenize parts a name into lower-case words: at separators, between letters
// and digits, and where capitals begin a word ("SaTemp").
func tokenize(name string) []string {
	var out []string
	var cur []rune
	flush := func() {
		if len(cur) > 0 {
			out = append(out, strings.ToLower(string(cur)))
			cur = cur[:0]
		}
	}
	rs := []rune(name)
	for i, r := range rs {
		switch {
		case unicode.IsLetter(r):
			if len(cur) > 0 {
				p := cur[len(cur)-1]
				if unicode.IsDigit(p) && !(len(cur) == 1 && p == '0') {
					flush()
				} else if unicode.IsUpper(r) && unicode.IsLower(p) {
					flush()
				} else if unicode.IsUpper(r) && unicode.IsUpper(p) && i+1 < len(rs) && unicode.IsLower(rs[i+1]) && len(cur) >= 2 {
					flush() // "SATemp": SA, Temp
				}
			}
			cur = append(cur, r)
		case unicode.IsDigit(r):
			if len(cur) > 0 && !unicode.IsDigit(cur[len(cur)-1]) {
				if s := strings.ToLower(string(cur)); !(s == "co" && r == '2') {
					flush()
				}
			}
			cur = append(cur, r)
		case r == '/' && len(cur) > 0 && strings.EqualFold(string(cur), "on"): // on/off
		default:
			flush()
		}
	}
	flush()
	return out
}

// readTokens gathers what the words say, the number of words that say nothing,
// and the reading in words.
func readTokens(tokens []string) (t trait, unknown int, read []string) {
	for i := 0; i < len(tokens); {
		// Two words that make one: "dew point", "set point", "hot water".
		if i+1 < len(tokens) {
			if x, ok := pairs[tokens[i]+" "+tokens[i+1]]; ok {
				t |= x
				read = append(read, told(tokens[i]+" "+tokens[i+1], x))
				i += 2
				continue
			}
		}
		w := tokens[i]
		i++
		if isNumber(w) {
			if len(tokens) > 1 && i > 1 && isUnitWord(tokens[i-2]) {
				continue // AHU 3
			}
			unknown++
			read = append(read, quote(w)+" not known")
			continue
		}
		x, ok := nameWords[w]
		if !ok {
			x, ok = compound(w)
		}
		if !ok {
			if right := misspelt(w); right != "" {
				x, ok = nameWords[right], true
				read = append(read, "“"+w+"” for “"+right+"”")
			}
		}
		if !ok {
			unknown++
			read = append(read, quote(w)+" not known")
			continue
		}
		t |= x
		if x&^anyFiller != 0 {
			read = append(read, told(w, x))
		}
	}
	return t, unknown, read
}

// misspelt is the known word that w is one letter away from, where there is one such
// word alone; short words are not taken for each other.
func misspelt(w string) string {
	const least = 6
	if len(w) < least || len(w) > 20 {
		return ""
	}
	found := ""
	for known := range nameWords {
		if d := len(known) - len(w); d > 1 || d < -1 || len(known) < least || known[0] != w[0] {
			continue
		}
		if editDistance(w, known) == 1 {
			if found != "" && nameWords[found] != nameWords[known] {
				return ""
			}
			if found == "" || known < found {
				found = known
			}
		}
	}
	return found
}

var pairs = map[string]trait{
	"dew point": tDew, "dew pt": tDew, "wet bulb": tWetBulb, "dry bulb": tTemp, "set point": tSetpoint, "set pt": tSetpoint, "hot water": tHW, "chilled water": tCHW, "relative humidity": tRH, "rel hum": tRH,
	"humidity ratio": tMoisture, "mixing ratio": tMoisture, "absolute humidity": tMoisture, "specific humidity": tMoisture, "static pressure": tPressure, "static press": tPressure, "stat press": tPressure, "st pr": tPressure, "static pr": tPressure,
	"start stop": tCommand, "on off": tStatus, "air neuf": tOA, "air soufflé": tSupply, "air souffle": tSupply, "point de": tSensor, "chilled wtr": tCHW, "hot wtr": tHW, "heat recovery": tRecovery, "heat wheel": tRecovery, "enthalpy wheel": tRecovery, "energy wheel": tRecovery, "energy recovery": tRecovery,
	"off coil": tCoil | tLeaving, "pre heat": tPre, "pre htg": tPre, "batterie chaude": tHeat | tCoil, "batterie froide": tCool | tCoil, "air flow": tFlow | tAir, "carbon dioxide": tCO2, "co 2": tCO2, "feed back": tFeedback, "make up": tOA, "fresh air": tOA, "air handler": tUnit, "s s": tCommand, "batería de": tCoil, "re heat": tBlock, "rueck meldung": tFeedback, "delta p": tDP, "diff press": tDP, "diff pressure": tDP, "differential pressure": tDP,
	"o a": tOA, "r a": tReturn, "s a": tSupply, "m a": tMixed, "e a": tExhaust, "out air": tOA, "occ mode": tOccupied, "occupied mode": tOccupied, "occupancy mode": tOccupied, "occ unocc": tOccupied,
	"kw vl": tCHW | tSupply, "kw rl": tCHW | tReturn, "ww vl": tHW | tSupply, "ww rl": tHW | tReturn, "hw vl": tHW | tSupply, "hw rl": tHW | tReturn, "klappe rm": tDamper | tFeedback, "ventil rm": tValve | tFeedback, "agua fría": tCHW, "agua fria": tCHW, "agua caliente": tHW, "agua helada": tCHW, "point de rosée": tDew, "punto de rocío": tDew,
	"supply fan": tSupply | tFan, "return fan": tReturn | tFan, "exhaust fan": tExhaust | tFan, "aire exterior": tOA, "eau chaude": tHW, "eau glacée": tCHW, "eau glacee": tCHW, "warm wasser": tHW,
}

func isUnitWord(w string) bool { return nameWords[w] == tUnit }

func isNumber(w string) bool {
	for _, r := range w {
		if !unicode.IsDigit(r) {
			return false
		}
	}
	return w != ""
}

// compound reads a word that is several known ones written together
// ("zulufttemperatur", "satemp"), each of at least two letters; the fewest parts
// win.
func compound(w string) (trait, bool) {
	const maxWord = 40
	if len(w) < 4 || len(w) > maxWord {
		return 0, false
	}
	type step struct {
		n int
		t trait
	}
	best := make([]step, len(w)+1)
	for i := 1; i <= len(w); i++ {
		for j := 0; j <= i-2; j++ {
			if j > 0 && best[j].n == 0 {
				continue
			}
			t, ok := nameWords[w[j:i]]
			if !ok && i < len(w) && w[i-1] == 's' { // German joints: "druck-s-..."
				t, ok = nameWords[w[j:i-1]]
			}
			if !ok || t&tBlock != 0 {
				continue
			}
			if n := best[j].n + 1; best[i].n == 0 || n < best[i].n {
				best[i] = step{n, best[j].t | t}
			}
		}
	}
	if best[len(w)].n == 0 || best[len(w)].n > 4 {
		return 0, false
	}
	return best[len(w)].t, true
}

// told words one reading: “SAT” supply temperature.
func told(word string, t trait) string {
	var b strings.Builder
	fmt.Fprintf(&b, "“%s”", word)
	for t != 0 {
		i := bits.TrailingZeros64(uint64(t))
		t &^= 1 << i
		b.WriteByte(' ')
		b.WriteString(traitNames[i])
	}
	return b.String()
}
