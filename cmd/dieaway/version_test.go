package main

import (
	"runtime/debug"
	"testing"
)

func TestDescribe(t *testing.T) {
	build := func(settings ...debug.BuildSetting) *debug.BuildInfo {
		return &debug.BuildInfo{GoVersion: "go1.26.8", Main: debug.Module{Version: "v1.2.0"}, Settings: settings}
	}
	revision := debug.BuildSetting{Key: "vcs.revision", Value: "0123456789abcdef0123456789abcdef01234567"}
	changed := debug.BuildSetting{Key: "vcs.modified", Value: "true"}
	tests := []struct {
		info *debug.BuildInfo
		want string
	}{
		{build(revision), "v1.2.0, revision 0123456789ab, go1.26.8"},
		{build(revision, changed), "v1.2.0, revision 0123456789ab with changes, go1.26.8"},
		{build(), "v1.2.0, revision not recorded, go1.26.8"},
		{&debug.BuildInfo{GoVersion: "go1.26.8"}, "(devel), revision not recorded, go1.26.8"},
	}
	for _, test := range tests {
		if got := describe(test.info); got != test.want {
			t.Errorf("describe = %q, want %q", got, test.want)
		}
	}
}

func TestShellQuote(t *testing.T) {
	tests := []struct{ in, want string }{
		{"loop07.csv", "loop07.csv"},
		{"--from=-2us", "--from=-2us"},
		{"loop 07", "'loop 07'"},
		{"it's", `'it'\''s'`},
		{"", "''"},
		{"a;b", "'a;b'"},
	}
	for _, test := range tests {
		if got := shellQuote(test.in); got != test.want {
			t.Errorf("shellQuote(%q) = %s, want %s", test.in, got, test.want)
		}
	}
}
