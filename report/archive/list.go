package archive

import (
	"bufio"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"strconv"
	"strings"
	"time"

	"dieaway/decay/quantity"
	"dieaway/report"
)

// schemaList names the form of the lines of [WriteJSON]; scripts depend on it.
const schemaList = "dieaway.archive.v1"

type jsonRecord struct {
	Schema     string  `json:"schema"`
	Device     string  `json:"device"`
	Entry      string  `json:"entry"` // its folder below the archive
	Measured   string  `json:"measured"`
	Kind       string  `json:"kind"`
	Status     string  `json:"status"`
	Verdict    *string `json:"verdict"` // on the limits
	Quantities struct {
		NaturalFrequency quantity.Quantity `json:"natural_frequency_hz"`
		Q                quantity.Quantity `json:"q"`
		TimeConstant     quantity.Quantity `json:"time_constant_s"`
	} `json:"quantities"`
	File         *string `json:"file"`
	SHA256       *string `json:"sha256"`
	ResultSchema *string `json:"result_schema"`
	Error        *string `json:"error,omitempty"`
}

// WriteJSON writes one line of JSON for each record, schema dieaway.archive.v1.
// Numbers that are not known are null.
func WriteJSON(w io.Writer, all []*Record) error {
	enc := json.NewEncoder(w)
	enc.SetEscapeHTML(false)
	for _, r := range all {
		j := jsonRecord{Schema: schemaList, Device: r.Device, Entry: r.Path(), Measured: r.Made.UTC().Format(time.RFC3339Nano),
			Kind: r.Kind, Status: r.Status, Verdict: orNull(r.Verdict), File: orNull(r.File), SHA256: orNull(r.SHA256), ResultSchema: orNull(r.Schema)}
		j.Quantities.NaturalFrequency, j.Quantities.Q, j.Quantities.TimeConstant = r.NaturalFrequency, r.Q, r.TimeConstant
		if r.Err != nil {
			j.Error = orNull(r.Err.Error())
		}
		if err := enc.Encode(j); err != nil {
			return err
		}
	}
	return nil
}

func orNull(s string) *string {
	if s == "" {
		return nil
	}
	return &s
}

// WriteCSV writes a table of the records with a row of names; numbers that are not
// known are empty.
func WriteCSV(w io.Writer, all []*Record) error {
	out := csv.NewWriter(w)
	_ = out.Write([]string{"device", "entry", "measured", "kind", "status", "verdict", "natural_frequency_hz", "natural_frequency_u_hz",
		"q", "q_u", "time_constant_s", "time_constant_u_s", "file", "sha256"})
	for _, r := range all {
		_ = out.Write([]string{r.Device, r.Path(), r.Made.UTC().Format(time.RFC3339Nano), r.Kind, r.Status, r.Verdict,
			cell(r.NaturalFrequency.Value), cell(r.NaturalFrequency.U), cell(r.Q.Value), cell(r.Q.U),
			cell(r.TimeConstant.Value), cell(r.TimeConstant.U), r.File, r.SHA256})
	}
	out.Flush()
	return out.Error() // the first of all
}

func cell(x float64) string {
	if x != x { // NaN
		return ""
	}
	return strconv.FormatFloat(x, 'g', -1, 64)
}

// WriteTable writes the records for people, device by device.
func WriteTable(w io.Writer, all []*Record) error {
	out := bufio.NewWriter(w)
	folder := ""
	for i, r := range all {
		if i == 0 || r.Folder != folder {
			if i > 0 {
				fmt.Fprintln(out)
			}
			folder = r.Folder
			fmt.Fprintf(out, "%s, in %s\n", report.Clean(r.Device, 60), folder)
			fmt.Fprintf(out, "  %-19s  %-11s  %-8s  %-9s  %-21s %-14s time constant\n", "measured (UTC)", "kind", "result", "limits", "natural frequency", "Q")
		}
		line := fmt.Sprintf("  %-19s  %-11s  %-8s  %-9s  %-21s %-14s %s", r.Made.UTC().Format(time.DateTime),
			report.Clean(report.KindName(r.Kind), 12), report.Clean(r.Status, 12), report.Clean(r.Verdict, 12), shown(r.NaturalFrequency), shown(r.Q), shown(r.TimeConstant))
		fmt.Fprintln(out, strings.TrimRight(line, " "))
		if r.Err != nil {
			fmt.Fprintf(out, "    %s\n", report.Clean(r.Err.Error(), 0))
		}
	}
	return out.Flush()
}

func shown(q quantity.Quantity) string {
	if !q.Known() {
		return "-"
	}
	return q.String()
}
