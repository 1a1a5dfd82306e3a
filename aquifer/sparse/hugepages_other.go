//go:build !linux

package sparse

func preferHugePages([]float64) {}
