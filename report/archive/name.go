package archive

import (
	"crypto/sha256"
	"encoding/hex"
	"regexp"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"
)

// The length of a readable part of a folder's name: file systems allow 255 bytes,
// and some older ones fewer characters in a whole path.
const (
	mostRunes = 60
	mostBytes = 150
)

// plainName is a device name that is a folder's name as it stands.
var plainName = regexp.MustCompile(`^[a-z0-9_][a-z0-9_-]{0,59}$`)

// digested is what a name looks like that ends in the digest of another.
var digested = regexp.MustCompile(`-[0-9a-f]{10}$`)

// reserved are the names that some file systems keep for devices of their own.
var reserved = regexp.MustCompile(`^(con|prn|aux|nul|com[0-9]|lpt[0-9])$`)

// FolderOf returns the name of the folder of a device: its name where that is
// plain (lower-case letters a to z, digits, "-", "_"), otherwise what can be kept
// of it, in lower case, and 10 hexadecimal digits of its SHA-256. Two names never
// share a folder, also where upper and lower case are the same to the file system.
func FolderOf(device string) string {
	if plainName.MatchString(device) && !digested.MatchString(device) && !reserved.MatchString(device) {
		return device
	}
	sum := sha256.Sum256([]byte(device))
	return readable(device) + "-" + hex.EncodeToString(sum[:5])
}

// readable keeps letters, marks and digits of any script; a run of anything else
// becomes one dash.
func readable(device string) string {
	var b strings.Builder
	gap := false
	n := 0
	for _, c := range strings.ToLower(device) {
		if c == utf8.RuneError || !unicode.In(c, unicode.Letter, unicode.Mark, unicode.Digit) && c != '_' {
			gap = b.Len() > 0
			continue
		}
		if n++; n > mostRunes || b.Len()+utf8.RuneLen(c)+1 > mostBytes {
			break
		}
		if gap {
			b.WriteByte('-')
			gap = false
		}
		b.WriteRune(c)
	}
	if b.Len() == 0 {
		return "device"
	}
	return b.String()
}

// stampLayout is the UTC stamp at the head of an entry's name.
const stampLayout = "20060102T150405.000Z"

// entryName is a stamp, with or without a fraction, and 8 digits of a SHA-256.
var entryName = regexp.MustCompile(`^([0-9]{8}T[0-9]{6}(?:\.[0-9]{1,9})?Z)-([0-9a-f]{8})$`)

func nameOf(made time.Time, digest string) string {
	return made.UTC().Format(stampLayout) + "-" + digest[:8]
}

// parseName returns when the entry of this name was made and the head of the
// digest of its capture.
func parseName(name string) (made time.Time, digest string, ok bool) {
	parts := entryName.FindStringSubmatch(name)
	if parts == nil {
		return time.Time{}, "", false
	}
	made, err := time.Parse("20060102T150405Z", parts[1]) // takes a fraction too
	return made, parts[2], err == nil
}

// temporary is the name of an entry on its way, with the identity of its writer.
var temporary = regexp.MustCompile(`^\..+\.([0-9a-f]{16})\.tmp$`)
