package main

import "runtime/debug"

// version tells the version of the program and the revision it was built from,
// as far as the build recorded them.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "(unknown build)"
	}
	return describe(info)
}

func describe(info *debug.BuildInfo) string {
	settings := map[string]string{}
	for _, s := range info.Settings {
		settings[s.Key] = s.Value
	}
	revision := settings["vcs.revision"]
	switch {
	case revision == "":
		revision = "not recorded"
	case len(revision) > 12:
		revision = revision[:12]
	}
	if settings["vcs.modified"] == "true" {
		revision += " with changes"
	}
	number := info.Main.Version
	if number == "" {
		number = "(devel)"
	}
	return number + ", revision " + revision + ", " + info.GoVersion
}
