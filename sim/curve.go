package sim

import (
	"errors"
	"math"
	"sort"

	"gonum.org/v1/gonum/interp"
)

// Curve is a sensor that is not straight: what the converter sees for an output, known at points. The sensor
// itself goes through them smoothly and monotonically (Fritsch and Butland's cubic, SIAM J. Sci. Stat.
// Comput. 5, 1984, of package interp); the firmware has the points as a table and joins them by straight
// lines. Beyond its ends both go on straight.
type Curve struct {
	output, electric []float64
	smooth           interp.FritschButland
	rising           bool
}

// NewCurve takes the points, outputs rising, electric values rising or falling throughout, two or more.
func NewCurve(output, electric []float64) (*Curve, error) {
	bad := errors.New("a curve needs two points or more, outputs rising and electric values rising or falling throughout")
	n := len(output)
	if n < 2 || n != len(electric) || !finite(output) || !finite(electric) {
		return nil, bad
	}
	c := &Curve{
		output: append([]float64(nil), output...), electric: append([]float64(nil), electric...),
		rising: electric[1] > electric[0],
	}
	for i := 1; i < n; i++ {
		if !(output[i] > output[i-1]) || electric[i] == electric[i-1] || (electric[i] > electric[i-1]) != c.rising {
			return nil, bad
		}
	}
	if n > 2 {
		if err := c.smooth.Fit(c.output, c.electric); err != nil {
			return nil, err
		}
	}
	return c, nil
}

// Electric is what the converter sees for the output y.
func (c *Curve) Electric(y float64) float64 {
	n := len(c.output)
	switch {
	case n == 2:
		return line(c.output[0], c.electric[0], c.output[1], c.electric[1], y)
	case y < c.output[0]:
		return c.electric[0] + c.smooth.PredictDerivative(c.output[0])*(y-c.output[0])
	case y > c.output[n-1]:
		return c.electric[n-1] + c.smooth.PredictDerivative(c.output[n-1])*(y-c.output[n-1])
	}
	return c.smooth.Predict(y)
}

// Straightened is the output that the firmware's table gives for what the converter saw.
func (c *Curve) Straightened(v float64) float64 {
	n := len(c.electric)
	i := sort.Search(n-2, func(i int) bool { return (c.electric[i+1] >= v) == c.rising })
	return line(c.electric[i], c.output[i], c.electric[i+1], c.output[i+1], v)
}

// TableError is the largest difference between the straightened output and the true one between the points,
// and where it is, with a converter of no error.
func (c *Curve) TableError() (size, at float64) {
	const parts = 64 // of each piece: the error is smooth there, its peak found to (1/64)² of itself
	for i := 0; i+1 < len(c.output); i++ {
		for k := 1; k < parts; k++ {
			y := c.output[i] + (c.output[i+1]-c.output[i])*float64(k)/parts
			if e := math.Abs(c.Straightened(c.Electric(y)) - y); e > size {
				size, at = e, y
			}
		}
	}
	return size, at
}

// Slope is the steepness of the table's inverse around an output: output units by electric unit.
func (c *Curve) Slope(y float64) float64 {
	i := sort.Search(len(c.output)-2, func(i int) bool { return c.output[i+1] >= y })
	return (c.output[i+1] - c.output[i]) / (c.electric[i+1] - c.electric[i])
}

func line(x0, y0, x1, y1, x float64) float64 { return y0 + (y1-y0)*((x-x0)/(x1-x0)) }
