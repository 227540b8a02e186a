package circuit

import (
	"bytes"
	"errors"
	"strconv"
	"strings"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// An entry is one key of a bench file with its value.
type entry struct {
	key  string // dotted
	line int
	kind entryKind
	text string // a text without its quotes; a number as it is written
}

type entryKind int

const (
	kindText entryKind = iota
	kindNumber
	kindTable
	kindOther // true, dates, arrays
)

// shown is the value as it stands in the file.
func (e entry) shown() string {
	switch {
	case e.kind == kindText:
		return strconv.Quote(e.text)
	case e.kind == kindTable:
		return "a table"
	case e.text == "":
		return "a list"
	}
	return e.text
}

// readEntries returns the keys of a TOML text in their order, tables included.
// The library's decoder checks the text; its syntax tree knows the lines.
func readEntries(text []byte) ([]entry, *BenchError) {
	text = bytes.TrimPrefix(text, []byte("\ufeff")) // of editors that mark UTF-8
	if bytes.HasPrefix(text, []byte("\xff\xfe")) || bytes.HasPrefix(text, []byte("\xfe\xff")) {
		return nil, &BenchError{Err: errors.New("found UTF-16 text, expected UTF-8: save it in that encoding")}
	}
	var whole map[string]any
	if err := toml.Unmarshal(text, &whole); err != nil {
		return nil, syntaxError(err)
	}
	r := entryReader{}
	r.parser.Reset(text)
	prefix := ""
	for r.parser.NextExpression() {
		switch e := r.parser.Expression(); e.Kind {
		case unstable.Table, unstable.ArrayTable:
			key, line := r.key(e.Key())
			kind := kindTable
			if e.Kind == unstable.ArrayTable {
				kind = kindOther
			}
			prefix = key + "."
			r.entries = append(r.entries, entry{key: key, line: line, kind: kind})
		case unstable.KeyValue:
			r.keyValue(prefix, e)
		}
	}
	if err := r.parser.Error(); err != nil {
		return nil, syntaxError(err)
	}
	return r.entries, nil
}

func syntaxError(err error) *BenchError {
	text := "TOML: " + strings.TrimPrefix(err.Error(), "toml: ")
	if strings.Contains(text, "strings must be quoted") || strings.Contains(text, "expected newline but got") {
		text += `; a value with its unit stands in quotes, as "1.62 mH"`
	}
	out := &BenchError{Err: errors.New(text)}
	var decode *toml.DecodeError
	if errors.As(err, &decode) {
		out.Line, _ = decode.Position()
	}
	return out
}

type entryReader struct {
	parser  unstable.Parser
	entries []entry
}

// key returns the dotted key and its line.
func (r *entryReader) key(parts unstable.Iterator) (key string, line int) {
	var names []string
	for parts.Next() {
		n := parts.Node()
		if line == 0 {
			line = r.parser.Shape(n.Raw).Start.Line
		}
		names = append(names, string(n.Data))
	}
	return strings.Join(names, "."), line
}

// keyValue adds one key and, of an inline table, those within it.
func (r *entryReader) keyValue(prefix string, kv *unstable.Node) {
	key, line := r.key(kv.Key())
	e := entry{key: prefix + key, line: line, kind: kindOther}
	value := kv.Value()
	switch value.Kind {
	case unstable.String:
		e.kind, e.text = kindText, string(value.Data)
	case unstable.Integer, unstable.Float:
		e.kind, e.text = kindNumber, strings.ReplaceAll(string(value.Data), "_", "")
	case unstable.InlineTable:
		e.kind = kindTable
	case unstable.Array:
	default:
		e.text = string(value.Data)
	}
	r.entries = append(r.entries, e)
	if value.Kind == unstable.InlineTable {
		for it := value.Children(); it.Next(); {
			r.keyValue(e.key+".", it.Node())
		}
	}
}
