package lti

import (
	"testing"

	"steadytick/internal/dd"
)

// sixthOrder is a sampled loop of order 6: type 2, a lightly damped mode, at 10 kHz,
// crossover near 60 rad/s.
func sixthOrder(b *testing.B, ticks int) TF {
	T := num(b, "1e-4")
	poles := toDelta([]dd.Complex{dd.C(-600, 0), dd.C(-0.9, 300), dd.C(-0.9, -300), dd.C(-4000, 0)}, T)
	zeros := toDelta([]dd.Complex{dd.C(-18, 0), dd.C(-2, 340), dd.C(-2, -340)}, T)
	zeros = append(zeros, dd.C(-12000, 0), dd.C(-15000, 0))
	l := TF{Num: fromRoots(zeros), Poles: poles, OriginPoles: 2, Period: T, Ticks: ticks}
	v := l.Freq(60)
	return l.Scale(dd.One.Div(dd.New(abs128(v))))
}

func BenchmarkAnalyze(b *testing.B) {
	for _, c := range []struct {
		name  string
		ticks int
	}{{"order 6", 0}, {"order 6, 3 ticks", 3}, {"order 6, 40 ticks", 40}, {"order 6, 10000 ticks", 10000}} {
		b.Run(c.name, func(b *testing.B) {
			l := sixthOrder(b, c.ticks)
			for b.Loop() {
				if _, err := Analyze(l, 64); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkSeparate(b *testing.B) {
	l := sixthOrder(b, 1)
	b.Run("poles", func(b *testing.B) {
		for b.Loop() {
			ClosedPoles(l, 64)
		}
	})
	b.Run("count", func(b *testing.B) {
		for b.Loop() {
			UnstableCount(l)
		}
	})
	b.Run("margins", func(b *testing.B) {
		for b.Loop() {
			Margins(l, true)
		}
	})
	b.Run("series", func(b *testing.B) {
		s := unity(Constant(dd.One, l.Period), l)
		for b.Loop() {
			s.TrackingSeries(4)
		}
	})
}

func BenchmarkScan(b *testing.B) {
	s, err := sixthOrder(b, 1).Scan()
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		s.At(60)
	}
}

func BenchmarkFreq(b *testing.B) {
	l := sixthOrder(b, 1)
	for b.Loop() {
		l.Freq(60)
	}
}
