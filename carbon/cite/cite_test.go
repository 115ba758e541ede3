package cite

import (
	"go/ast"
	"go/parser"
	"go/token"
	"strconv"
	"strings"
	"testing"
)

func TestForms(t *testing.T) {
	for _, c := range []struct {
		w    *Work
		want string
	}{
		{Gough1981, "Gough 1981"},
		{CooganDosso2015, "Coogan & Dosso 2015"},
		{Walker1981, "Walker et al. 1981"},
	} {
		if got := c.w.Short(); got != c.want {
			t.Errorf("got %q, want %q", got, c.want)
		}
	}
	if got, want := Walker1981.Long(), "Walker, J. C. G.; Hays, P. B.; Kasting, J. F. (1981). A negative feedback mechanism for the long-term stabilization of Earth's surface temperature. Journal of Geophysical Research 86, 9776-9782."; got != want {
		t.Errorf("got  %q\nwant %q", got, want)
	}
	b := Walker1981.BibTeX()
	for _, part := range []string{"@article{walker1981,\n", "author = {Walker, J. C. G. and Hays, P. B. and Kasting, J. F.}", "pages = {9776--9782}", "year = {1981}"} {
		if !strings.Contains(b, part) {
			t.Errorf("BibTeX lacks %q:\n%s", part, b)
		}
	}
	if b := TurcotteSchubert2002.BibTeX(); !strings.Contains(b, "@book{") || !strings.Contains(b, "publisher = {Cambridge") {
		t.Errorf("a book comes out as\n%s", b)
	}
	for _, c := range []struct {
		r    Ref
		want string
	}{
		{Ref{Work: Gough1981, Where: "eq. 1", Trust: Memory}, "Gough 1981, eq. 1 (from memory)"},
		{Own("because"), "because (own choice, no published source)"},
		{Ref{Trust: Practice}, "common practice, no source"},
		{Ref{}, ""},
	} {
		if got := c.r.String(); got != c.want {
			t.Errorf("got %q, want %q", got, c.want)
		}
	}
}

func TestSorted(t *testing.T) {
	got := Sorted([]*Work{Zeng2016, nil, Abbot2012, Zeng2016, CaldeiraKasting1992Life, CaldeiraKasting1992Ice})
	want := []*Work{Abbot2012, CaldeiraKasting1992Ice, CaldeiraKasting1992Life, Zeng2016}
	if len(got) != len(want) {
		t.Fatalf("%d works, want %d", len(got), len(want))
	}
	for i := range want {
		if got[i] != want[i] {
			t.Errorf("%d: %s, want %s", i, got[i].Key, want[i].Key)
		}
	}
}

// TestEveryWork reads works.go: keys are unique, and authors, year, title and
// journal stand in every entry.
func TestEveryWork(t *testing.T) {
	file, err := parser.ParseFile(token.NewFileSet(), "works.go", nil, 0)
	if err != nil {
		t.Fatal(err)
	}
	seen := map[string]bool{}
	ast.Inspect(file, func(n ast.Node) bool {
		lit, ok := n.(*ast.CompositeLit)
		if !ok {
			return true
		}
		if id, ok := lit.Type.(*ast.Ident); !ok || id.Name != "Work" {
			return true
		}
		has := map[string]string{}
		for _, e := range lit.Elts {
			kv := e.(*ast.KeyValueExpr)
			text := "set"
			if b, ok := kv.Value.(*ast.BasicLit); ok && b.Kind == token.STRING {
				text, _ = strconv.Unquote(b.Value)
			}
			has[kv.Key.(*ast.Ident).Name] = text
		}
		for _, k := range []string{"Key", "Authors", "Year", "Title", "Journal"} {
			if has[k] == "" {
				t.Errorf("work %q has no %s", has["Key"], k)
			}
		}
		if seen[has["Key"]] {
			t.Errorf("key %q twice", has["Key"])
		}
		seen[has["Key"]] = true
		return true
	})
	if len(seen) < 50 {
		t.Errorf("only %d works read", len(seen))
	}
}
