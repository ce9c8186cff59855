package synth

// DemoUnit is unit i of the demo site.
func DemoUnit(o SiteOptions, i int) (Spec, error) {
	o, err := o.settle()
	if err != nil {
		return Spec{}, err
	}
	f, err := demo(o)
	if err != nil {
		return Spec{}, err
	}
	return f.unit(i), nil
}

// DemoKinds is the number of units after which the demo's list begins again.
func DemoKinds() int { return len(demoUnits) }
