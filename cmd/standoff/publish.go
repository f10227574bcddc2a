package main

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"strconv"

	"standoff/measure/wav"
	"standoff/report"
)

// publish writes everything that follows from a session's takes.
func (a *analysed) publish(version string) error {
	if err := a.writeResult(); err != nil {
		return err
	}
	if err := a.writeImpulses(); err != nil {
		return err
	}
	return a.writePages(version)
}

func (a *analysed) writeResult() error {
	return a.folder.WriteFile("result.json", func(w io.Writer) error {
		enc := json.NewEncoder(w)
		enc.SetIndent("", "  ")
		enc.SetEscapeHTML(false)
		return enc.Encode(a.result)
	})
}

// writeImpulses keeps the averaged impulse response of each distance, 32-bit
// float, the direct sound 60 ms after the beginning.
func (a *analysed) writeImpulses() error {
	for _, g := range a.groups {
		mean, _ := a.meanImpulse(g)
		samples := make([]float32, len(mean))
		for i, v := range mean {
			samples[i] = float32(v)
		}
		file := &wav.File{Format: wav.Format{SampleRate: a.exc.Rate, Channels: 1, Bits: 32, Float: true}, Samples: [][]float32{samples}}
		err := a.folder.WriteFile("responses/"+g.distance.Label+".wav", func(w io.Writer) error { return wav.Encode(w, file) })
		if err != nil {
			return err
		}
	}
	return nil
}

// writePages writes the table of responses, the PDF and every figure.
func (a *analysed) writePages(version string) error {
	d := a.data(version)
	if err := a.folder.WriteFile("responses.csv", func(w io.Writer) error { return writeCSV(w, d.Responses) }); err != nil {
		return err
	}
	style := report.DefaultStyle()
	err := a.folder.WriteFile("report.pdf", func(w io.Writer) error { return report.Write(w, d, style) })
	if err != nil {
		return err
	}
	plots, err := report.Plots(d, style)
	if err != nil {
		return fmt.Errorf("plots: %w", err)
	}
	for _, p := range plots {
		if err := a.folder.WriteFile("plots/"+p.Name+".png", p.WritePNG); err != nil {
			return err
		}
		if err := a.folder.WriteFile("plots/"+p.Name+".svg", p.WriteSVG); err != nil {
			return err
		}
	}
	return nil
}

// writeCSV is RFC 4180: a line for each frequency, three columns for each
// distance. The uncertainty is expanded, k = 2.
func writeCSV(w io.Writer, responses []report.Response) error {
	out := csv.NewWriter(w)
	out.UseCRLF = true
	head := []string{"frequency_hz"}
	for _, r := range responses {
		head = append(head, r.Label+"_level_db", r.Label+"_phase_deg", r.Label+"_uncertainty_db")
	}
	if err := out.Write(head); err != nil {
		return err
	}
	if len(responses) > 0 {
		for i, f := range responses[0].Hz {
			row := []string{fixed(f, 3)}
			for _, r := range responses {
				row = append(row, fixed(r.DB[i], 4), fixed(r.Degrees[i], 3), fixed(r.Expanded[i], 4))
			}
			if err := out.Write(row); err != nil {
				return err
			}
		}
	}
	out.Flush()
	return out.Error()
}

func fixed(v float64, digits int) string { return strconv.FormatFloat(v, 'f', digits, 64) }
