// Package assets holds what a report carries besides its own words: a build of
// Apache ECharts and the licences of everything in it. build.sh tells how the
// build is made.
package assets

import (
	"bytes"
	"compress/gzip"
	_ "embed"
	"io"
	"strings"
)

// EChartsGzip is the library, compressed with gzip.
//
//go:embed echarts.js.gz
var EChartsGzip []byte

// ECharts returns the library as the browser runs it.
func ECharts() ([]byte, error) {
	z, err := gzip.NewReader(bytes.NewReader(EChartsGzip))
	if err != nil {
		return nil, err
	}
	return io.ReadAll(z)
}

var (
	//go:embed licences/echarts.txt
	echarts string
	//go:embed licences/echarts-notice.txt
	notice string
	//go:embed licences/zrender.txt
	zrender string
	//go:embed licences/d3.txt
	d3 string
	//go:embed licences/tslib.txt
	tslib string
)

// Licences returns the notices and licences of everything a report embeds.
func Licences() string {
	var b strings.Builder
	b.WriteString("Each report embeds a build of some parts of Apache ECharts 6.1.0 and of the libraries it is made of.\n")
	for _, l := range []struct{ name, text string }{
		{"Apache ECharts 6.1.0: NOTICE", notice},
		{"Apache ECharts 6.1.0: Apache License, Version 2.0", echarts},
		{"zrender 6.1.0: BSD 3-Clause License", zrender},
		{"parts of d3 in ECharts: BSD 3-Clause License", d3},
		{"tslib 2.3.0: Zero-Clause BSD", tslib},
	} {
		text := strings.TrimSpace(strings.ReplaceAll(l.text, "\r\n", "\n"))
		b.WriteString("\n" + l.name + "\n" + strings.Repeat("-", len(l.name)) + "\n\n" + text + "\n")
	}
	return b.String()
}
