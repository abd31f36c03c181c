package study

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"math/big"
	"slices"

	"steadytick/loop"
)

// Ways to draw the symbols within their spreads.
const (
	DrawUniform = "uniform" // every value alike
	DrawNormal  = "normal"  // sigma a third of the spread, cut at the spread
	DrawCorners = "corners" // every combination of both ends
)

const (
	// MostTrials and DefaultTrials bound and fill SpreadOptions.Trials.
	MostTrials    = 100_000_000
	DefaultTrials = 1000
	// mostCornerSymbols: 2^16 corners are a minute of work.
	mostCornerSymbols = 16
	// fewCornerSymbols: up to 2^10 corners are looked at beside the trials.
	fewCornerSymbols = 10
)

// SpreadOptions steers a study over tolerances.
type SpreadOptions struct {
	Draw     string // "": uniform
	Trials   int64  // 0: DefaultTrials; not used with corners
	Seed     uint64 // as given
	Simulate bool   // the figures of runs too; without it only those that requirements name
	Required Figure // yield asked for, per cent; not OK: none
	Rate     string // the flags that the loop was read with, for the parts
	Map      string
	Curves   bool // fill Spread.Curves for the report
	Version  string
	Rows     io.Writer                        // gets every trial as a line, as a part 1/1; nil: nobody
	Progress func(what string, done, all int) // nil: silent; not called from two goroutines at once
}

var (
	// ErrNoSpread says that there is nothing to draw.
	ErrNoSpread = errors.New("no symbol of the loop file has a spread; give the uncertain ones a tolerance under symbols, such as J: {value: 0.018, spread: 20 %}")
	// ErrTooManyCorners says that corners are too many.
	ErrTooManyCorners = errors.New("too many corners")
)

// RunSpread analyses the loop with its symbols drawn within their spreads. The result depends on the loop and the options alone, not on the
// number of processors. It returns an error when the loop as written cannot be analysed, and ErrNoSpread where nothing has a spread.
func RunSpread(ctx context.Context, l *loop.Loop, o SpreadOptions) (*Spread, error) {
	j, err := newSpreadJob(ctx, l, o)
	if err != nil {
		return nil, err
	}
	out, err := j.partWriter(o.Rows, SpreadPart{1, 1})
	if err != nil {
		return nil, err
	}
	err = j.run(1, j.trials, func(row *spreadRow) error {
		j.tally.add(row)
		return out.write(row)
	})
	if err == nil {
		err = out.end()
	}
	if err != nil {
		return nil, err
	}
	return j.result()
}

// spreadJob is the work of one study.
type spreadJob struct {
	ctx     context.Context
	l       *loop.Loop
	o       SpreadOptions
	trials  int64
	symbols []loop.Symbol // those drawn
	metrics []string
	list    []*constraint // without "can run": what cannot run has failed
	refused []loop.Requirement
	want    simulated
	between bool
	nominal *spreadRow
	tally   *spreadTally
}

func newSpreadJob(ctx context.Context, l *loop.Loop, o SpreadOptions) (*spreadJob, error) {
	j := &spreadJob{ctx: ctx, l: l, o: o, trials: o.Trials}
	for _, s := range l.Symbols {
		if s.Spread != nil && s.Spread.Sign() > 0 && s.Value.Sign() != 0 {
			j.symbols = append(j.symbols, s)
		}
	}
	if len(j.symbols) == 0 {
		return nil, ErrNoSpread
	}
	switch {
	case o.Draw == "":
		j.o.Draw = DrawUniform
	case o.Draw == DrawCorners && len(j.symbols) > mostCornerSymbols:
		return nil, fmt.Errorf("%w: %d symbols have a spread, and corners are drawn of %d at most; take the spread off those that matter least (the sensitivities of a uniform draw tell which), or draw uniform or normal",
			ErrTooManyCorners, len(j.symbols), mostCornerSymbols)
	case o.Draw == DrawCorners:
		j.trials = 1 << len(j.symbols)
	case o.Draw != DrawUniform && o.Draw != DrawNormal:
		return nil, fmt.Errorf("%q is no way to draw; the choices are %s, %s and %s", o.Draw, DrawUniform, DrawNormal, DrawCorners)
	}
	if j.trials == 0 {
		j.trials = DefaultTrials
	}
	list, refused := constraints(l)
	j.list, j.refused = slices.DeleteFunc(list, func(c *constraint) bool { return c.name == "runs" }), refused
	j.metrics = spreadMetrics(l, o.Simulate, j.list)
	for _, name := range j.metrics {
		need := needsOf(name)
		j.want.step, j.want.tracking = j.want.step || need.step, j.want.tracking || need.tracking
		j.between = j.between || betweenTicks(name)
	}
	var err error
	if j.nominal, err = j.evaluate(0, l); err != nil {
		return nil, err
	}
	if j.nominal.failed != "" {
		return nil, errors.New(j.nominal.failed)
	}
	j.tally = newSpreadTally(j, true)
	return j, nil
}

// spreadMetrics are the metrics that the file has the data for: of the linear analysis, of runs where simulate asks for them, and those
// that constraints name.
func spreadMetrics(l *loop.Loop, simulate bool, list []*constraint) []string {
	var out []string
	for _, m := range loop.Metrics() {
		named := slices.ContainsFunc(list, func(c *constraint) bool { return c.name == m.Name })
		switch {
		case named:
		case !judged(m.Name), m.Inputs != nil && !hasInput(l, m.Inputs), m.Name == "processor_load":
			continue
		case needsOf(m.Name).any() && !simulate:
			continue
		case !declares(l, m.Name):
			continue
		}
		out = append(out, m.Name)
	}
	return out
}

// spreadBlock is how many trials are handed out together; they are taken in again in their order, so that no sum depends on
// who was first.
const spreadBlock = 256

// run evaluates the trials from first to last, a block at a time on all processors, and gives each to take in the order of their numbers.
func (j *spreadJob) run(first, last int64, take func(*spreadRow) error) error {
	all := int(last - first + 1)
	step := j.progress("trials", all)
	for from := first; from <= last; from += spreadBlock {
		rows := make([]*spreadRow, min(spreadBlock, last-from+1))
		var count counter
		err := parallel(len(rows), func(i int) (err error) {
			if err := j.ctx.Err(); err != nil {
				return err
			}
			rows[i], err = j.trial(from + int64(i))
			step(int(from-first) + count.next())
			return err
		})
		if err != nil {
			return err
		}
		for _, row := range rows {
			if err := take(row); err != nil {
				return err
			}
		}
	}
	return nil
}

// progress hands a step of the work to the caller; the counts of several goroutines come in any order.
func (j *spreadJob) progress(what string, all int) func(done int) {
	return (&rateJob{o: RateOptions{Progress: j.o.Progress}}).progress(what, all)
}

// trial draws and evaluates one trial.
func (j *spreadJob) trial(k int64) (*spreadRow, error) {
	row := &spreadRow{trial: k}
	values, problems := j.drawSymbols(row)
	return j.evaluateWith(row, values, problems)
}

// evaluateWith evaluates the loop with the symbols of a row.
func (j *spreadJob) evaluateWith(row *spreadRow, values map[string]*big.Rat, problems loop.Problems) (*spreadRow, error) {
	var l *loop.Loop
	if len(problems) == 0 {
		l, problems = j.l.WithSymbols(values)
	}
	if len(problems) > 0 {
		row.failed = problems[0].Message
		return row, j.ctx.Err()
	}
	out, err := j.evaluate(row.trial, l)
	if err == nil {
		out.symbols = row.symbols
	}
	return out, err
}

// drawSymbols draws the symbols of a row by its trial: each at value·(1 + spread·delta), to twelve digits.
func (j *spreadJob) drawSymbols(row *spreadRow) (map[string]*big.Rat, loop.Problems) {
	deltas := j.deltas(row.trial)
	return j.replace(row, func(i int, s loop.Symbol) *big.Rat {
		part := new(big.Rat).SetFloat64(deltas[i])
		part.Mul(part, s.Spread)
		part.Add(part, big.NewRat(1, 1))
		return twelveDigits(part.Mul(part, s.Value))
	})
}

// replace goes through the drawn symbols: value gives what stands in the place of the i-th. The values go to the row as well.
func (j *spreadJob) replace(row *spreadRow, value func(i int, s loop.Symbol) *big.Rat) (map[string]*big.Rat, loop.Problems) {
	values := map[string]*big.Rat{}
	row.symbols = slices.Repeat([]float64{math.NaN()}, len(j.symbols)) // what fails before its turn has no value
	_, problems := j.l.DrawSymbols(func(s loop.Symbol) *big.Rat {
		i := slices.IndexFunc(j.symbols, func(d loop.Symbol) bool { return d.Name == s.Name })
		if i < 0 {
			return nil
		}
		v := value(i, s)
		values[s.Name] = v
		row.symbols[i], _ = v.Float64()
		return v
	})
	return values, problems
}
