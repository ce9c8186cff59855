// Package synth simulates an air-handling unit, the building behind it, the
// weather before it and the sensors on it, with faults on demand. It makes the
// demo site, the examples and the units on which rules are tested.
//
// It is forward physics only: from actuator positions to states, never from
// readings back to books. It shares moist-air properties with the rest of the
// program and nothing else, so that a test against it is no test of the program
// against itself.
//
// Every component conserves energy and water exactly; what is simplified are
// the laws that set its positions and duties. They are stated where they stand,
// with their source or as common practice. All weather, buildings and units are
// invented.
package synth
