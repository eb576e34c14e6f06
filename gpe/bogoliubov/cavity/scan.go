package cavity

import "context"

// Point is the modes at one length of a scan.
type Point struct {
	Length float64
	Modes  []Mode
}

// Scan returns the modes of the cavity at each of the lengths. Modes at one
// length are the guesses for the next, which makes rising or falling lengths
// in small steps quick; the results do not depend on it. It stops with ctx's
// error when ctx is done, and otherwise returns errors of New and Modes.
// progress, which may be nil, is told how many lengths are done.
func (c Cavity) Scan(ctx context.Context, lengths []float64, progress func(done int)) ([]Point, error) {
	points := make([]Point, 0, len(lengths))
	var guesses []Mode
	for i, length := range lengths {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		at, err := New(c.Velocity, c.Outside, c.Inside, length, c.Width)
		if err != nil {
			return nil, err
		}
		modes, err := at.Modes(guesses...)
		if err != nil {
			return nil, err
		}
		points = append(points, Point{length, modes})
		guesses = continued(points)
		if progress != nil {
			progress(i + 1)
		}
	}
	return points, nil
}

// continued guesses the modes at the next length: each at its place and, where
// the last two points have as many, where a straight line leads if the steps
// are even.
func continued(points []Point) []Mode {
	last := points[len(points)-1].Modes
	if len(points) < 2 {
		return last
	}
	var guesses []Mode
	before := points[len(points)-2].Modes
	for _, m := range last {
		near, best := Mode{}, 0.0
		for _, b := range before {
			if d := size(b.Omega() - m.Omega()); near == (Mode{}) || d < best {
				near, best = b, d
			}
		}
		if ahead := (Mode{2*m.Frequency - near.Frequency, 2*m.GrowthRate - near.GrowthRate}); near != (Mode{}) && ahead.GrowthRate > 0 {
			guesses = append(guesses, ahead)
		}
	}
	return append(guesses, last...)
}
