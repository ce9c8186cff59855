package finding

// Text is the caution in words. Every one defers to local codes and to licensed
// practice; none replaces them.
func (c Caution) Text() string {
	switch c {
	case Isolate:
		return "Before opening equipment, stop it, isolate it and lock it out; fans start without warning. Follow the site's procedures and local codes, and leave the work to people licensed for it."
	case HotSurfaces:
		return "Steam, hot water and hot surfaces burn. Let the part cool and relieve its pressure before touching or opening it."
	case Stagnant:
		return "Standing water in ducts, pans or humidifiers can grow microbes. Do not stir or spray it; wear protection, and have it cleaned as local health rules ask."
	case Ventilation:
		return "Outdoor air is a matter of code and of health. Do not reduce it to save energy without the designer's or the authority's word."
	case Freezing:
		return "A coil can freeze and burst within minutes, and water then reaches people and electrical parts. Do not bypass a low-temperature cut-out."
	}
	return ""
}
