package main

import (
	"os"
	"runtime"
	"runtime/debug"
	"strconv"
	"strings"
)

// garbagePercent is how much garbage may lie beside what is in use before it is collected, in jobs that hold more than largeHeap. Most of their
// memory is long arrays of numbers, which the collector need not look through: that takes a third off the peak of a million nodes.
// Small jobs keep the default: at 100,000 nodes collecting as often made factor and solves three times slower.
const (
	garbagePercent = 30
	largeHeap      = 300 << 20 // [bytes]
)

// collectAtStage collects what the last stage left, and sets garbagePercent, where a large job enters a stage: the next asks for large pieces at
// once, before the collector would have run by itself. GOGC of the user holds.
func collectAtStage() {
	var now runtime.MemStats
	runtime.ReadMemStats(&now)
	if now.HeapAlloc < largeHeap || os.Getenv("GOGC") != "" {
		return
	}
	debug.SetGCPercent(garbagePercent)
	runtime.GC()
}

// availableMemory asks Linux how much memory a job may take; 0 where there is no answer [bytes].
func availableMemory() int64 {
	meminfo, err := os.ReadFile("/proc/meminfo")
	if err != nil {
		return 0
	}
	available := memAvailable(string(meminfo))
	limit, used := wholeNumber("/sys/fs/cgroup/memory.max"), wholeNumber("/sys/fs/cgroup/memory.current")
	if limit > 0 && used >= 0 && used < limit && limit-used < available {
		return limit - used
	}
	return available
}

// memAvailable reads the line MemAvailable of /proc/meminfo; 0 where there is none [bytes].
func memAvailable(meminfo string) int64 {
	for line := range strings.Lines(meminfo) {
		fields := strings.Fields(line)
		if len(fields) == 3 && fields[0] == "MemAvailable:" && fields[2] == "kB" {
			if v, err := strconv.ParseInt(fields[1], 10, 54); err == nil && v > 0 {
				return v * 1024
			}
		}
	}
	return 0
}

// wholeNumber reads a file that holds one whole number; -1 where it does not.
func wholeNumber(name string) int64 {
	data, err := os.ReadFile(name)
	if err != nil {
		return -1
	}
	v, err := strconv.ParseInt(strings.TrimSpace(string(data)), 10, 64)
	if err != nil {
		return -1
	}
	return v
}
