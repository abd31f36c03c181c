// Package charts writes result structs as HTML reports. It formats and thins; it computes no figure.
//
// Report turns a study.Compare into one HTML file that opens from disk without a network, prints on
// paper and can be read without colour.
//
// Conventions. A figure in a table stands in an element with the attributes
//
//	data-figure   its path in the JSON result, joined with dots: sampled.steady.0.ripple
//	data-value    the exact value as the JSON writes it: a number, "inf", null, true, or a string
//	data-scale    the power of ten that the shown text is divided by (1e-3 for ms); absent for 1
//
// and its text has six significant digits. Infinite is shown as ∞, not applicable as —, with a pointer
// to the warning that explains it when one names the figure.
//
// A curve keeps its line style in the whole report: the style goes with its name, in the order of first
// appearance. Curves that mean the same loop must therefore have the same name in all charts, and the
// variant's name in the degradation table.
//
// Limits. A curve of more than 2000 points is thinned for drawing; the extremes of each stretch are kept.
// A curve with a number that is not finite, or with X and Y of different length, is refused (CurveError),
// because the chart library would leave the whole chart out without a word.
package charts
