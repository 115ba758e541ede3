package main

import (
	"embed"
	"fmt"
	"strings"

	"cycle/reports/assets"
)

// The licence of each library in the program, by the last part of its path.
//
//go:embed licences/*.txt
var licenceFiles embed.FS

// libraries lists what is linked in, in the order it is shown.
var libraries = []struct{ module, file string }{
	{"Go standard library", "go"},
	{"github.com/VividCortex/ewma", "ewma"},
	{"github.com/acarl005/stripansi", "stripansi"},
	{"github.com/andybalholm/brotli", "brotli"},
	{"github.com/clipperhouse/uax29/v2", "uax29"},
	{"github.com/go-echarts/go-echarts/v2", "go-echarts"},
	{"github.com/google/uuid", "uuid"},
	{"github.com/klauspost/compress", "compress"},
	{"github.com/mattn/go-runewidth", "go-runewidth"},
	{"github.com/parquet-go/bitpack", "bitpack"},
	{"github.com/parquet-go/jsonlite", "jsonlite"},
	{"github.com/parquet-go/parquet-go", "parquet-go"},
	{"github.com/pelletier/go-toml/v2", "go-toml"},
	{"github.com/pierrec/lz4/v4", "lz4"},
	{"github.com/spf13/pflag", "pflag"},
	{"github.com/twpayne/go-geom", "go-geom"},
	{"github.com/vbauerster/cupwriter", "cupwriter"},
	{"github.com/vbauerster/mpb/v8", "mpb"},
	{"golang.org/x/sys", "sys"},
	{"golang.org/x/term", "term"},
	{"gonum.org/v1/gonum", "gonum"},
	{"google.golang.org/protobuf", "protobuf"},
}

var licencesCommand = command{
	name: "licences", short: "licences of the program and of everything in it", run: licences,
	usage: `
Prints the licence of cycle, of the libraries linked into it and of what each report
embeds.

  cycle licences
`,
}

func licences(u *ui, _ *options, _ []string) int {
	show := func(title, file string) error {
		data, err := licenceFiles.ReadFile("licences/" + file + ".txt")
		if err != nil {
			return err
		}
		fmt.Fprintf(u.out, "%s\n%s\n\n%s\n\n", title, strings.Repeat("=", len(title)), strings.TrimSpace(strings.ReplaceAll(string(data), "\r\n", "\n")))
		return nil
	}
	err := show("cycle "+version, "cycle")
	for _, l := range libraries {
		if err == nil {
			err = show(l.module, l.file)
		}
	}
	if err != nil {
		return u.fail(err)
	}
	fmt.Fprint(u.out, assets.Licences())
	return exitOK
}
