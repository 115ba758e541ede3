package scenarios

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"strings"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// maxFile bounds the size of a scenario or a table.
const maxFile = 1 << 20

// shape is the TOML type of a value.
type shape int

const (
	text    shape = iota // a string
	integer              // as written
	float                // as written
	boolean
	list
	table
	date
	bare // text of --set without quotes; the key decides what it is
)

var shapeWords = [...]string{"the text", "the number", "the number", "the word", "a list", "a table", "a date", ""}

// value is a TOML value before the key has told what it means.
type value struct {
	shape shape
	text  string // strings decoded, numbers as written
}

// found words the value for a message.
func (v value) found() string {
	switch v.shape {
	case text, bare:
		return quote(v.text)
	case list, table:
		return shapeWords[v.shape]
	case date:
		return shapeWords[v.shape] + " " + v.text
	}
	t := v.text
	if len(t) > 60 {
		t = t[:57] + "..."
	}
	return shapeWords[v.shape] + " " + t
}

// overflows reports a number that TOML has no room for.
func (v value) overflows() bool {
	x, ok := parseNumber(v)
	return v.shape == integer && (!ok || math.Abs(x) >= 1<<63) || v.shape == float && (!ok || math.IsInf(x, 0))
}

// setting is one key of one layer.
type setting struct {
	key  string
	val  value
	line int
}

// layer is what one place says: a built-in scenario, a file or the --set flags.
type layer struct {
	origin   string
	file     string // for messages
	dir      string // where relative paths start; "-" when there are none
	settings []setting
	data     []byte // the text, for the section [uncertain]
}

// readFile reads a regular file of bounded size. A pipe or a device could make
// the reader wait for ever and is refused.
func readFile(path string) ([]byte, error) {
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, &KeyError{File: path, What: "there is no such file"}
	case err != nil:
		return nil, &FileError{path, cause(err)}
	case info.IsDir():
		return nil, &KeyError{File: path, Found: "a folder", Allowed: "a file"}
	case !info.Mode().IsRegular():
		return nil, &KeyError{File: path, Found: "a pipe or a device", Allowed: "a regular file"}
	case info.Size() > maxFile:
		return nil, tooLarge(path, info.Size())
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, &FileError{path, cause(err)}
	}
	defer f.Close()
	data, err := io.ReadAll(io.LimitReader(f, maxFile+1))
	if err != nil {
		return nil, &FileError{path, cause(err)}
	}
	if len(data) > maxFile {
		return nil, tooLarge(path, int64(len(data)))
	}
	return data, nil
}

func tooLarge(path string, size int64) error {
	return &KeyError{File: path, What: "the file is too large", Found: fmt.Sprintf("%.2f MiB", float64(size)/(1<<20)), Allowed: "at most 1 MiB"}
}

// cause strips the path from an error of package os: the message names it already.
func cause(err error) error {
	var pe *fs.PathError
	if errors.As(err, &pe) {
		return pe.Err
	}
	return err
}

// checkText refuses what is no text at all before a parser words it badly.
func checkText(file string, data []byte) *KeyError {
	lineOf := func(i int) int { return 1 + bytes.Count(data[:i], []byte("\n")) }
	if i := bytes.IndexByte(data, 0); i >= 0 {
		return &KeyError{File: file, Line: lineOf(i), What: "this is no text file", Found: "a zero byte", Allowed: "TOML in UTF-8"}
	}
	if !utf8.Valid(data) {
		for i := 0; i < len(data); {
			r, n := utf8.DecodeRune(data[i:])
			if r == utf8.RuneError && n == 1 {
				return &KeyError{File: file, Line: lineOf(i), What: "this is not UTF-8", Found: fmt.Sprintf("the byte 0x%02x", data[i]), Allowed: "TOML in UTF-8"}
			}
			i += n
		}
	}
	return nil
}

// parse turns TOML into settings, in file order. It finds syntax errors and keys
// set twice; whether a key is known is for the caller's accept to say, which
// returns nil for a known key or section. It reports false when the text is no
// TOML; other problems leave the good keys in the layer.
//
// The decoder of the library needs time that grows with the square of the number
// of keys (half a minute for 1 MiB of short keys), so it runs only on a file all
// of whose keys are known.
func parse(l *layer, data []byte, accept func(key string, header bool) *KeyError, errs *Errors) bool {
	if e := checkText(l.file, data); e != nil {
		errs.add(e)
		return false
	}
	data = bytes.TrimPrefix(data, []byte("\ufeff"))
	l.data = data
	before := len(errs.List)
	var p unstable.Parser
	p.Reset(data)
	var prefix []string
	refused := false // the keys of a refused section are passed over
	odd := false     // a value no key allows, which will be said where its key is set
	keys, headers := map[string]int{}, map[string]int{}
	line := func(n *unstable.Node) int { return p.Shape(n.Raw).Start.Line }

	unknown := func(e *KeyError, at int) {
		e.File, e.Line = l.file, at
		errs.add(e)
	}
	var leafs func(path []string, v *unstable.Node, at int)
	leafs = func(path []string, v *unstable.Node, at int) {
		if errs.full() {
			return
		}
		key := join(path)
		if v.Kind == unstable.InlineTable && accept(key, true) == nil {
			headers[key] = at
			for it := v.Children(); it.Next(); {
				kv := it.Node()
				if errs.full() { // finding a line takes time
					return
				}
				if kv.Kind != unstable.KeyValue {
					continue
				}
				sub, n := keyOf(kv.Key(), path)
				leafs(sub, kv.Value(), line(n))
			}
			return
		}
		if e := accept(key, false); e != nil {
			unknown(e, at)
			return
		}
		if first, twice := keys[key]; twice {
			errs.add(&KeyError{File: l.file, Line: at, Key: key, What: fmt.Sprintf("set twice, first in line %d", first)})
			return
		}
		keys[key] = at
		val := valueOf(v)
		odd = odd || val.shape >= list || val.overflows()
		l.settings = append(l.settings, setting{key, val, at})
	}
	for !errs.full() && p.NextExpression() {
		switch e := p.Expression(); e.Kind {
		case unstable.Table:
			var n *unstable.Node
			prefix, n = keyOf(e.Key(), nil)
			if isUncertain(prefix) { // read by uncertainFields
				refused = false
				continue
			}
			key, at := join(prefix), line(n)
			bad := accept(key, true)
			if refused = bad != nil; refused {
				unknown(bad, at)
				continue
			}
			if first, twice := headers[key]; twice {
				errs.add(&KeyError{File: l.file, Line: at, Key: key, What: fmt.Sprintf("the section [%s] stands here a second time, first in line %d", short(key), first)})
			}
			headers[key] = at
		case unstable.ArrayTable:
			var n *unstable.Node
			prefix, n = keyOf(e.Key(), nil)
			key := join(prefix)
			errs.add(&KeyError{File: l.file, Line: line(n), Key: key, Found: "a list of tables, [[" + short(key) + "]]", Allowed: "a section, [" + short(key) + "]"})
			refused = true
		case unstable.KeyValue:
			if refused {
				continue
			}
			path, n := keyOf(e.Key(), prefix)
			if isUncertain(path) {
				continue
			}
			leafs(path, e.Value(), line(n))
		}
	}
	if err := p.Error(); err != nil && !errs.full() {
		e := &KeyError{File: l.file, What: "TOML syntax: " + strings.TrimPrefix(err.Error(), "toml: ")}
		var pe *unstable.ParserError
		if errors.As(err, &pe) {
			off := min(int(p.Range(pe.Highlight).Offset), len(data))
			e.Line = 1 + bytes.Count(data[:off], []byte("\n"))
			start := bytes.LastIndexByte(data[:off], '\n') + 1
			e.What += fmt.Sprintf(" (column %d)", 1+utf8.RuneCount(data[start:off]))
		}
		errs.add(e)
		return false
	}
	if odd || len(errs.List) > before {
		return true
	}
	// What is left are the finer rules of redefinition and of number ranges.
	var whole map[string]any
	if err := toml.Unmarshal(data, &whole); err != nil {
		e := &KeyError{File: l.file, What: strings.TrimPrefix(err.Error(), "toml: ")}
		var de *toml.DecodeError
		if errors.As(err, &de) {
			e.Line, _ = de.Position()
			e.Key = join(de.Key())
		}
		errs.add(e)
		return false
	}
	return true
}

// keyOf joins a key to its prefix and returns its first node.
func keyOf(it unstable.Iterator, prefix []string) ([]string, *unstable.Node) {
	path := append([]string(nil), prefix...)
	var first *unstable.Node
	for it.Next() {
		if first == nil {
			first = it.Node()
		}
		path = append(path, string(it.Node().Data))
	}
	return path, first
}

// join writes a dotted key; a part that needs quotes in TOML gets them.
func join(parts []string) string {
	var b strings.Builder
	for i, p := range parts {
		if i > 0 {
			b.WriteByte('.')
		}
		if isBare(p) {
			b.WriteString(p)
		} else {
			b.WriteString(tomlString(p))
		}
	}
	return b.String()
}

func isBare(s string) bool {
	for i := 0; i < len(s); i++ {
		c := s[i]
		if !(c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' || c >= '0' && c <= '9' || c == '_' || c == '-') {
			return false
		}
	}
	return s != ""
}

// short cuts a key that is too long for a message.
func short(key string) string {
	if len(key) <= 80 {
		return key
	}
	cut := 77
	for !utf8.RuneStart(key[cut]) {
		cut--
	}
	return key[:cut] + "..."
}

func valueOf(n *unstable.Node) value {
	switch n.Kind {
	case unstable.String:
		return value{text, string(n.Data)}
	case unstable.Integer:
		return value{integer, string(n.Data)}
	case unstable.Float:
		return value{float, string(n.Data)}
	case unstable.Bool:
		return value{boolean, string(n.Data)}
	case unstable.Array:
		return value{shape: list}
	case unstable.InlineTable:
		return value{shape: table}
	}
	return value{date, string(n.Data)}
}

// parseSet reads one KEY=VALUE of --set. A value in TOML quotes is unquoted;
// anything else is taken as it stands.
func parseSet(arg string) (setting, *KeyError) {
	key, raw, ok := strings.Cut(arg, "=")
	key, raw = strings.TrimSpace(key), strings.TrimSpace(raw)
	if !ok || key == "" {
		return setting{}, &KeyError{File: "--set", Found: quote(arg), Allowed: "KEY=VALUE, such as weathering.land.efold=\"20 K\""}
	}
	if !utf8.ValidString(arg) || strings.ContainsRune(arg, 0) {
		return setting{}, &KeyError{File: "--set", Found: quote(arg), Allowed: "text in UTF-8"}
	}
	if len(arg) > maxFile {
		return setting{}, &KeyError{File: "--set", Key: short(key), Found: fmt.Sprintf("%d characters", len(arg)), Allowed: "at most 1 MiB"}
	}
	v := value{bare, raw}
	if raw != "" && (raw[0] == '"' || raw[0] == '\'') {
		parsed, ok := parseValue(raw)
		if !ok || parsed.shape != text {
			return setting{}, &KeyError{File: "--set", Key: short(key), Found: quote(raw), Allowed: "a text with closed quotes, or without any"}
		}
		v = parsed
	}
	return setting{key: key, val: v}, nil
}

// parseValue reads exactly one TOML value.
func parseValue(raw string) (value, bool) {
	var p unstable.Parser
	p.Reset([]byte("x = " + raw))
	if !p.NextExpression() || p.Expression().Kind != unstable.KeyValue {
		return value{}, false
	}
	e := p.Expression()
	v := valueOf(e.Value())
	if p.NextExpression() || p.Error() != nil {
		return value{}, false
	}
	return v, true
}
