package assets

import (
	"crypto/sha256"
	"encoding/hex"
	"strings"
	"testing"
)

// The sums that build.sh printed.
const (
	sumGzip  = "f9e3e63ac6930c75c7fa5495f7678488b8d319914f67f94704c49c3130608d6b"
	sumPlain = "b4f36a4ce849f030a02893f97dfa11f8ebaf5985f084570c3d60e50c590cc069"
)

func TestECharts(t *testing.T) {
	if s := sha256.Sum256(EChartsGzip); hex.EncodeToString(s[:]) != sumGzip {
		t.Errorf("echarts.js.gz has sum %x, not that of the recipe", s)
	}
	js, err := ECharts()
	if err != nil {
		t.Fatal(err)
	}
	if s := sha256.Sum256(js); hex.EncodeToString(s[:]) != sumPlain {
		t.Errorf("echarts.js has sum %x, not that of the recipe", s)
	}
	for _, bad := range []string{"new Function", "</script", "eval("} {
		if strings.Contains(string(js), bad) {
			t.Errorf("the build holds %q", bad)
		}
	}
	if !strings.Contains(string(js[:400]), "Apache License") {
		t.Error("the build does not name its licence")
	}
}

func TestLicences(t *testing.T) {
	text := Licences()
	for _, want := range []string{"The Apache Software Foundation (https://www.apache.org/)", "Apache License\n", "Copyright (c) 2017, Baidu", "Mike Bostock", "Microsoft Corporation"} {
		if !strings.Contains(text, want) {
			t.Errorf("the licences lack %q", want)
		}
	}
	if strings.ContainsAny(text, "\r") {
		t.Error("carriage returns in the licences")
	}
}
