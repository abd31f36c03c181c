package study

import (
	"runtime"
	"sync"
)

// parallel calls f(0) … f(n−1) on as many processors as there are and returns the
// error of the lowest index. Calls must not touch each other's results.
func parallel(n int, f func(i int) error) error {
	errs := make([]error, n)
	jobs := make(chan int)
	var group sync.WaitGroup
	for range min(n, runtime.GOMAXPROCS(0)) {
		group.Go(func() {
			for i := range jobs {
				errs[i] = f(i)
			}
		})
	}
	for i := range n {
		jobs <- i
	}
	close(jobs)
	group.Wait()
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}
