package scenarios

import (
	"fmt"
	"sort"
	"strconv"
	"strings"

	"cycle/carbon"
)

// A KeyError is one thing wrong in a scenario: where it stands, what was found
// and what is allowed.
type KeyError struct {
	File    string // file as named by the user, or "--set"
	Line    int    // 0 when there is none
	Key     string // full dotted key; empty when no key is concerned
	What    string // what is wrong, when found and allowed do not say it
	Found   string // with quotes where it is the user's text
	Allowed string
	Near    string // nearest known key, scenario or word

	hints   []string
	section string // whose keys are allowed, filled in by settle
}

func (e *KeyError) Error() string {
	where := printable(e.File)
	if e.Line > 0 {
		where += ":" + strconv.Itoa(e.Line)
	}
	var head []string
	for _, s := range []string{where, e.Key, e.What} {
		if s != "" {
			head = append(head, s)
		}
	}
	msg := strings.Join(head, ": ")
	var tail []string
	if e.Found != "" {
		tail = append(tail, "found "+e.Found)
	}
	if e.Allowed != "" {
		tail = append(tail, "allowed is "+e.Allowed)
	}
	if len(tail) > 0 {
		sep := ": "
		if e.What != "" {
			sep = "; "
		}
		msg += sep + strings.Join(tail, "; ")
	}
	return msg
}

// Hints tells what to do next, one sentence each.
func (e *KeyError) Hints() []string {
	var out []string
	if e.Near != "" {
		out = append(out, fmt.Sprintf("did you mean %s?", strconv.Quote(e.Near)))
	}
	return append(out, e.hints...)
}

// A FileError is a failure of the file system while reading.
type FileError struct {
	File string
	Err  error
}

func (e *FileError) Error() string { return fmt.Sprintf("%s: cannot be read: %v", e.File, e.Err) }
func (e *FileError) Unwrap() error { return e.Err }

// Errors is everything wrong in a scenario, in file order, up to a limit.
type Errors struct {
	List []*KeyError
	More bool // reading stopped at the limit
}

const maxErrors = 10

func (e *Errors) Error() string {
	var lines []string
	for _, k := range e.List {
		lines = append(lines, k.Error())
	}
	if e.More {
		lines = append(lines, "more problems may follow")
	}
	return strings.Join(lines, "\n")
}

// Unwrap gives errors.As the single problems.
func (e *Errors) Unwrap() []error {
	out := make([]error, len(e.List))
	for i, k := range e.List {
		out[i] = k
	}
	return out
}

// add records a problem.
func (e *Errors) add(k *KeyError) {
	if len(e.List) >= maxErrors {
		e.More = true
		return
	}
	k.Key = short(printable(k.Key))
	e.List = append(e.List, k)
}

func (e *Errors) full() bool { return e.More }

// settle puts the problems in file order and lists the keys an unknown one
// could have been under the laws that were chosen.
func (e *Errors) settle(s *carbon.Setup) {
	place := map[string]int{}
	for i, k := range e.List {
		if _, seen := place[k.File]; !seen {
			place[k.File] = i
		}
	}
	sort.SliceStable(e.List, func(i, j int) bool {
		a, b := e.List[i], e.List[j]
		if a.File != b.File {
			return place[a.File] < place[b.File]
		}
		return a.Line < b.Line
	})
	for _, k := range e.List {
		for _, sec := range s.Sections() {
			if k.section == "" || sec.Name != k.section {
				continue
			}
			var names []string
			for _, key := range keysOf(&sec) {
				names = append(names, key.Name)
			}
			k.Allowed = "a key of [" + sec.Name + "]: " + strings.Join(names, ", ")
		}
	}
}

// Nearest returns the candidate that a mistyped word most likely means, or ""
// when none is near. Distance counts inserted, deleted, replaced and swapped
// letters; a candidate that ends in the same part after the last dot counts as
// nearer.
func Nearest(word string, candidates []string) string {
	const longest = 80 // beyond this it is no typing error
	if word == "" || len(word) > longest {
		return ""
	}
	w := []rune(strings.ToLower(word))
	limit := max(2, len(w)/3)
	best, bestScore := "", 1<<30
	for _, c := range candidates {
		if strings.HasSuffix(c, "."+word) {
			return c
		}
		d := distance(w, []rune(strings.ToLower(c)))
		same := leaf(c) == leaf(word) && strings.Contains(c, ".")
		if d > limit && !same {
			continue
		}
		score := 2 * d
		if same {
			score -= 5
		}
		if score < bestScore {
			best, bestScore = c, score
		}
	}
	return best
}

func leaf(key string) string { return key[strings.LastIndexByte(key, '.')+1:] }

// distance is the optimal string alignment distance.
func distance(a, b []rune) int {
	prev2, prev, cur := make([]int, len(b)+1), make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range prev {
		prev[j] = j
	}
	for i := 1; i <= len(a); i++ {
		cur[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			cur[j] = min(prev[j]+1, cur[j-1]+1, prev[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				cur[j] = min(cur[j], prev2[j-2]+1)
			}
		}
		prev2, prev, cur = prev, cur, prev2
	}
	return prev[len(b)]
}

// quote shortens the user's text and quotes it, so that no control character
// reaches a terminal.
func quote(s string) string {
	const longest = 60
	n := 0
	for i := range s {
		if n == longest {
			s = s[:i] + "..."
			break
		}
		n++
	}
	return strconv.Quote(s)
}

// printable quotes a name that could disturb a terminal.
func printable(s string) string {
	for _, r := range s {
		if !strconv.IsPrint(r) {
			return strconv.Quote(s)
		}
	}
	return s
}

// words lists quoted words: "a", "b" or "c".
func words(list []string) string {
	q := make([]string, len(list))
	for i, s := range list {
		q[i] = strconv.Quote(s)
	}
	if len(q) < 2 {
		return strings.Join(q, "")
	}
	return strings.Join(q[:len(q)-1], ", ") + " or " + q[len(q)-1]
}
