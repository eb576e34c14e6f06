// Package figure draws the figures of a report in one style: the flow, the
// correlation map, the cut across its band, the sweep in space and time, and
// the null of the band's strength.
//
// Each figure is a struct of plain numbers in the units of its axes, whose Page
// method lays it out. Lengths of slices that do not belong together are
// mistakes of the program and panic; numbers that are not finite are left out,
// as gaps in lines and as grey cells in maps.
//
// The style is for print and for referees: colours that the colour-blind tell
// apart (those of M. Okabe and K. Ito, from memory) and that differ in
// lightness or in dashes, so that they also do in grey; colour maps that are
// even to the eye, a diverging one about zero for correlations; the unit on
// every axis and colour bar; nothing drawn over the data but what is about it.
package figure
