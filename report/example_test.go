package report_test

import (
	"fmt"
	"io"
	"log"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/report"
)

// The page of evidence of one capture; io.Discard stands for a file.
func Example() {
	c, err := capture.ReadFile("../cmd/dieaway/demo/loop07.csv", capture.Options{})
	if err != nil {
		log.Fatal(err)
	}
	r := &report.RingDown{Capture: c, Device: "loop 07"}
	r.Channel, r.Result = decay.AnalyzeCapture(c, decay.Options{})
	if err := r.WritePage(io.Discard); err != nil {
		log.Fatal(err)
	}
	fmt.Println(r.Device, "is", r.Status())
	// Output: loop 07 is good
}
