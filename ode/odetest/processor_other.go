//go:build !unix

package odetest

import "time"

var begun = time.Now()

// processor is the time on the clock, where that of the processor is not to be had.
func processor() time.Duration { return time.Since(begun) }
