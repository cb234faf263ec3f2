package main

import (
	"math"
	"syscall"

	"steelyard/meta"
)

// pooled is what a run over all sets took and found.
type pooled struct {
	seconds        float64 // of processor time
	estimate, tau2 float64 // means over the sets
}

// models are what the peer's methods are called here.
var models = map[string]meta.Model{
	"moments":    {Level: 0.95, Tau: meta.DerSimonianLaird, Interval: meta.Wald},
	"likelihood": {Level: 0.95},
}

// pool pools all sets on one core. Like the peer it leaves the p-values out.
func (d *sets) pool(method string) (pooled, error) {
	var p meta.Pooler
	var result pooled
	m, start := models[method], cpuSeconds()
	for from := 0; from < len(d.y); from += d.k {
		mean, err := p.Brief(m, d.y[from:from+d.k], d.s[from:from+d.k])
		if err != nil {
			return result, err
		}
		result.estimate += mean.Estimate
		result.tau2 += mean.Tau2
	}
	n := float64(len(d.y) / d.k)
	result.seconds, result.estimate, result.tau2 = cpuSeconds()-start, result.estimate/n, result.tau2/n
	return result, nil
}

// best pools all sets five times and returns the fastest run.
func (d *sets) best(method string) (pooled, error) {
	fastest := pooled{seconds: math.Inf(1)}
	for range 5 {
		result, err := d.pool(method)
		if err != nil {
			return fastest, err
		}
		if result.seconds < fastest.seconds {
			fastest = result
		}
	}
	return fastest, nil
}

// cpuSeconds returns the processor time that this process has taken.
func cpuSeconds() float64 {
	var usage syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &usage); err != nil {
		return math.NaN()
	}
	return float64(usage.Utime.Nano()+usage.Stime.Nano()) / 1e9
}
