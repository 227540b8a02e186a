package decay_test

import (
	"fmt"
	"log"

	"dieaway/capture"
	"dieaway/decay"
)

// The main job: read a capture, find the free decay in it, and quote what it says.
func Example() {
	c, err := capture.ReadFile("../cmd/dieaway/demo/loop07.csv", capture.Options{})
	if err != nil {
		log.Fatal(err)
	}
	channel, result := decay.AnalyzeCapture(c, decay.Options{})
	fmt.Printf("%s: %s\n", channel.Name, result.Status)
	if q := result.Quantities; q != nil { // nil when refused
		fmt.Printf("f0 %v, Q %v\n", q.NaturalFrequency, q.Q)
	}
	// Output:
	// capacitor voltage: good
	// f0 124.3025(55) kHz, Q 15.805(22)
}
