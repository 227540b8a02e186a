package archive_test

import (
	"fmt"
	"io"
	"log"
	"os"
	"time"

	"dieaway/capture"
	"dieaway/decay"
	"dieaway/report"
	"dieaway/report/archive"
)

// File a measurement, and look whether all of the archive is whole.
func Example() {
	dir, err := os.MkdirTemp("", "evidence")
	if err != nil {
		log.Fatal(err)
	}
	defer os.RemoveAll(dir)
	const name = "../../cmd/dieaway/demo/loop07.csv"
	c, err := capture.ReadFile(name, capture.Options{})
	if err != nil {
		log.Fatal(err)
	}
	r := &report.RingDown{Capture: c, Device: "loop 07"}
	r.Channel, r.Result = decay.AnalyzeCapture(c, decay.Options{})
	source := archive.Source{Kind: "capture", Name: name, SHA256: c.SHA256, Open: func() (io.ReadCloser, error) { return os.Open(name) }}
	entry := &archive.Entry{Made: time.Now(), Result: r.WriteJSON, Report: r.WritePage, Sources: []archive.Source{source}}
	if _, err := archive.Add(dir, r.Device, entry); err != nil {
		log.Fatal(err)
	}
	v, err := archive.Verify(dir)
	fmt.Println(v.Entries, "entry,", len(v.Problems), "problems,", err)
	// Output: 1 entry, 0 problems, <nil>
}
