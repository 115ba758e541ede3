package reports

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"reflect"
	"sort"
	"strconv"
	"strings"

	"cycle/carbon/record"
)

// SummaryFormat is the number under "format" in summary.json. It changes when
// a reader of the file would have to change.
const SummaryFormat = 1

// SummaryJSON writes the run as summary.json: UTF-8, indented by two spaces,
// keys in a fixed order. The keys and units are those of the json tags of
// record.Run and of what it holds; a key ends in its unit (time_gyr,
// temperature_k, outgassing_tmol_yr), margins carry a "unit" of their own,
// and frozen_share, carbon_drift, residual, gain and the tolerances are pure
// numbers.
//
//	format        1
//	title, scenario, hash, version, seed
//	outcome       kind, time_gyr, error_gyr, sentence, why
//	start         the state the history begins in; start_words says how it was found
//	reference     the state at the reference age (reference_age_gyr)
//	feedback      gain, response_time_kyr, sensitivity and forcing per doubling
//	episodes      state, start_gyr, end_gyr
//	marks         name, time_gyr, error_gyr
//	margins       closest approaches: boundary, side, time_gyr, value, unit, words
//	zones, stays  limits of the habitable zone, and the time spent inside
//	solver        what the integrator did
//	laws, works   what was used, with sources
//	warnings      doubts that belong to the result
//
// Numbers have at most ten significant digits. A number that was not computed,
// or is infinite, is null; a list without entries is []. The origin of inputs,
// the command line and paths are not part of the file, so that the same
// scenario gives the same bytes wherever it is run.
func SummaryJSON(w io.Writer, r *record.Run) error {
	out := *r
	out.Format = SummaryFormat
	var b bytes.Buffer
	if err := writeJSON(&b, reflect.ValueOf(out), ""); err != nil {
		return err
	}
	b.WriteByte('\n')
	_, err := w.Write(b.Bytes())
	return err
}

// writeJSON writes plain data as encoding/json would, but for numbers: they
// are rounded, and one that is not finite is null.
func writeJSON(b *bytes.Buffer, v reflect.Value, indent string) error {
	inner := indent + "  "
	switch v.Kind() {
	case reflect.Struct:
		b.WriteString("{")
		sep := "\n"
		for i := range v.NumField() {
			name, _, _ := strings.Cut(v.Type().Field(i).Tag.Get("json"), ",")
			if name == "-" {
				continue
			}
			if name == "" {
				return fmt.Errorf("reports: %s.%s has no name in summary.json", v.Type(), v.Type().Field(i).Name)
			}
			fmt.Fprintf(b, "%s%s%q: ", sep, inner, name)
			sep = ",\n"
			if err := writeJSON(b, v.Field(i), inner); err != nil {
				return err
			}
		}
		b.WriteString("\n" + indent + "}")
	case reflect.Map:
		keys := v.MapKeys()
		sort.Slice(keys, func(i, j int) bool { return keys[i].String() < keys[j].String() })
		if len(keys) == 0 {
			b.WriteString("{}")
			return nil
		}
		b.WriteString("{")
		sep := "\n"
		for _, k := range keys {
			b.WriteString(sep + inner)
			sep = ",\n"
			if err := writeJSON(b, k, inner); err != nil {
				return err
			}
			b.WriteString(": ")
			if err := writeJSON(b, v.MapIndex(k), inner); err != nil {
				return err
			}
		}
		b.WriteString("\n" + indent + "}")
	case reflect.Slice:
		if v.Len() == 0 {
			b.WriteString("[]")
			return nil
		}
		b.WriteString("[")
		sep := "\n"
		for i := range v.Len() {
			b.WriteString(sep + inner)
			sep = ",\n"
			if err := writeJSON(b, v.Index(i), inner); err != nil {
				return err
			}
		}
		b.WriteString("\n" + indent + "]")
	case reflect.Float64:
		f := v.Float()
		if math.IsNaN(f) || math.IsInf(f, 0) {
			b.WriteString("null")
			return nil
		}
		if f == 0 {
			f = 0 // no negative zero
		}
		b.WriteString(strconv.FormatFloat(f, 'g', 10, 64))
	case reflect.String:
		var s bytes.Buffer
		enc := json.NewEncoder(&s)
		enc.SetEscapeHTML(false)
		if err := enc.Encode(v.String()); err != nil {
			return err
		}
		b.Write(bytes.TrimRight(s.Bytes(), "\n"))
	case reflect.Bool:
		b.WriteString(strconv.FormatBool(v.Bool()))
	case reflect.Int, reflect.Int64:
		b.WriteString(strconv.FormatInt(v.Int(), 10))
	case reflect.Uint64:
		b.WriteString(strconv.FormatUint(v.Uint(), 10))
	default:
		return fmt.Errorf("reports: %s has no form in summary.json", v.Type())
	}
	return nil
}
