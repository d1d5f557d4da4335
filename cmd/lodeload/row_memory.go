package main

import (
	"runtime"
	"unsafe"
)

// memoryRows hold what the evaluator of the network takes in memory against the bytes of its columns alone.
func memoryRows(b *bench) ([]*contest, error) {
	before := liveBytes()
	w, err := b.load()
	if err != nil {
		return nil, err
	}
	w.turn()
	// What is beside the evaluator in the world: the columns that the databases are filled
	// from, and samples.
	beside := int64(len(w.obligations))*8 + int64(len(w.points))*4 + int64(len(w.sample))*int64(unsafe.Sizeof(sampled{}))
	return []*contest{{
		work: "bytes of the evaluator in memory", against: "its columns alone", asked: 1.0 / 3,
		ours:   func() (float64, error) { return float64(liveBytes() - before - beside), nil },
		theirs: func() (float64, error) { return float64(w.engine.Bytes()), nil },
	}}, nil
}

// liveBytes is what is in use after everything else has been given back.
func liveBytes() int64 {
	runtime.GC()
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	return int64(m.HeapAlloc)
}
