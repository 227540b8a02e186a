package capture_test

import (
	"errors"
	"fmt"
	"os"
	"strings"

	"dieaway/capture"
)

// loop07 is the ring of loop 07 as a spreadsheet might save it.
const loop07 = `loop 07, C = 1.0 nF
Sampling interval: 2 us
t [us];V_C [mV];state
0,0;3210,5;armed
2,0;-152,25;
4,0;-2987,0;
6,0;****;
8,0;2780,75;
10,0;260,0;
12,0;-2588,5;
14,0;-355,0;
`

func ExampleRead() {
	c, err := capture.Read(strings.NewReader(loop07), "loop 07.csv", capture.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	ch, err := c.Channel("V_C")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(ch.Name, ch.Unit, ch.Samples[:4])
	fmt.Println(ch.Axis.N, "samples every", ch.Axis.Interval, "s from", ch.Axis.Start, "s")
	for _, f := range c.Findings {
		fmt.Println(f.Code+":", f.Message)
	}
	// Output:
	// V_C V [3.2105 -0.15225 -2.987 NaN]
	// 8 samples every 2e-06 s from 0 s
	// missing-samples: 1 of 8 samples of V_C are missing or over range, and left out.
	// ignored-columns: Columns not read as channels: 3 "state" (text: a few cells only hold anything).
}

func ExampleCapture_Explain() {
	c, err := capture.Read(strings.NewReader(loop07), "loop 07.csv", capture.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	if err := c.Explain(os.Stdout); err != nil {
		fmt.Println(err)
	}
	// Output:
	// loop 07.csv
	//   text       UTF-8
	//   SHA-256    17c593050cce608cfafe8973d8bf1022240f51ae667f1f20f5658341b857cee0
	//   lines      preamble to line 2, names in line 3, samples from line 4 on
	//   separator  semicolon, decimal mark ","
	//   column 1   time "t" in us: its unit is us
	//   column 2   channel "V_C" in mV: numbers
	//   column 3   text "state": a few cells only hold anything
	//   channel 1  "V_C" in V, 8 samples
	//   time       V_C: 8 samples from 0 s, every 2 µs, even, printed to 100 ns (time column, regression over 8 stamps; unit of time in the header)
	//   warning    missing-samples: 1 of 8 samples of V_C are missing or over range, and left out.
	//   note       ignored-columns: Columns not read as channels: 3 "state" (text: a few cells only hold anything).
}

func ExampleError() {
	text := strings.Replace(loop07, "2780,75", "27 80,75", 1)
	_, err := capture.Read(strings.NewReader(text), "loop 07.csv", capture.Options{})
	fmt.Println(err)
	var e *capture.Error
	if errors.As(err, &e) {
		fmt.Println(e.Line, e.Column, errors.Is(err, capture.ErrSyntax))
	}
	// Output:
	// loop 07.csv: line 8, column 2: found "27 80,75", expected a number
	// 8 2 true
}

func ExampleCapture_Channel() {
	c, err := capture.Read(strings.NewReader(loop07), "loop 07.csv", capture.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	_, err = c.Channel("V_R")
	fmt.Println(err)
	// Output:
	// no channel "V_R" in loop 07.csv, which has 1 "V_C"
}
