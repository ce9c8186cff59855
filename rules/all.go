package rules

import "slices"

// All lists every rule, in the order of the reports. A rule that is not fit to
// run stands here as a comment with the reason.
func All() []*Rule {
	return []*Rule{
		rhImpossible,
		rhPinned,
		readingFrozen,
		sensorOffset,

		mixedTempOutsideStreams,
		oaDamperStuck,
		oaDamperLeaks,

		moistureGainInSensibleCoil,
		moistureLossInSensibleCoil,
		moistureGainInCoolingCoil,
		heatValvePasses,
		coolValvePasses,

		freeCoolingMissed,
		runsUnoccupied,
		freezeDanger,
	}
}

// Find is the rule of that name, or nil.
func Find(name string) *Rule {
	all := All()
	if i := slices.IndexFunc(all, func(r *Rule) bool { return r.Name == name }); i >= 0 {
		return all[i]
	}
	return nil
}
