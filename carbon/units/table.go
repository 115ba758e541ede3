package units

import (
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"
)

// TableBytes is the largest size of a user's table.
const TableBytes = 1 << 20

const (
	tableRows = 100000
	tableStep = 0.999e-9 // Gyr between two rows
)

// TableColumn is one column of a user's table, with the numbers it may hold.
type TableColumn struct {
	Name     string
	Lo, Hi   float64
	Optional bool // may be missing, as may the optional ones after it
}

// ReadTable reads a user's CSV of something through time. The first column is
// age_gyr, rising by a year or more from row to row; a header names the columns,
// lines that start with # are comments. It returns the columns, ages in yr, a
// missing optional column nil, and the text as read. An error names the line,
// what was found and what is allowed.
func ReadTable(r io.Reader, columns ...TableColumn) (cols [][]float64, text string, err error) {
	raw, err := io.ReadAll(io.LimitReader(r, TableBytes+1))
	if err != nil {
		return nil, "", err
	}
	if len(raw) > TableBytes {
		return nil, "", fmt.Errorf("found more than %d MB, allowed is less", TableBytes>>20)
	}
	columns = append([]TableColumn{{Name: "age_gyr", Lo: 0, Hi: 1e4}}, columns...)
	var headers []string
	for n := range columns {
		if n+1 == len(columns) || columns[n+1].Optional {
			var names []string
			for _, c := range columns[:n+1] {
				names = append(names, c.Name)
			}
			headers = append(headers, strings.Join(names, ","))
		}
	}
	header := strings.Join(headers, " or ")

	rd := csv.NewReader(strings.NewReader(strings.TrimPrefix(string(raw), "\ufeff")))
	rd.Comment, rd.TrimLeadingSpace, rd.FieldsPerRecord = '#', true, -1
	cols = make([][]float64, len(columns))
	width := 0
	for {
		rec, err := rd.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		var pe *csv.ParseError
		if errors.As(err, &pe) {
			return nil, "", fmt.Errorf("line %d: found a malformed row (%v), allowed is comma-separated numbers", pe.Line, pe.Err)
		}
		if err != nil {
			return nil, "", err
		}
		line, _ := rd.FieldPos(0)
		for i := range rec {
			rec[i] = strings.TrimSpace(rec[i])
		}
		if width == 0 {
			found := strings.Join(rec, ",")
			for _, h := range headers {
				if found == h {
					width = len(rec)
				}
			}
			if width == 0 {
				return nil, "", fmt.Errorf("line %d: found the columns %s, allowed is %s", line, quote(found), header)
			}
			continue
		}
		if len(rec) != width {
			return nil, "", fmt.Errorf("line %d: found %d columns, allowed is %d as in the header", line, len(rec), width)
		}
		for i, s := range rec {
			c := columns[i]
			x, err := strconv.ParseFloat(s, 64)
			if err != nil || !(x >= c.Lo && x <= c.Hi) {
				return nil, "", fmt.Errorf("line %d: found %s in column %s, allowed is a number from %g to %g", line, quote(s), c.Name, c.Lo, c.Hi)
			}
			cols[i] = append(cols[i], x)
		}
		n := len(cols[0])
		if n > 1 && !(cols[0][n-1]-cols[0][n-2] >= tableStep) {
			return nil, "", fmt.Errorf("line %d: found the age %s Gyr, allowed is at least 1 yr more than the %g Gyr of the row before", line, rec[0], cols[0][n-2])
		}
		if n > tableRows {
			return nil, "", fmt.Errorf("line %d: found more than %d rows, allowed is fewer", line, tableRows)
		}
	}
	if len(cols[0]) < 2 {
		return nil, "", fmt.Errorf("found %d rows of numbers, allowed is two or more under the columns %s", len(cols[0]), header)
	}
	for i := range cols[0] {
		cols[0][i] *= Gyr
	}
	return cols, string(raw), nil
}
