package capture

import "bytes"

// Signatures of what gets mistaken for a capture, and its name in words.
var signatures = []struct {
	at    int
	bytes string
	what  string
}{
	{0, "%PDF", "a PDF document"},
	{0, "\x89PNG", "a PNG image"},
	{0, "\xff\xd8\xff", "a JPEG image"},
	{0, "GIF8", "a GIF image"},
	{0, "BM", "a bitmap image"},
	{0, "II*\x00", "a TIFF image"},
	{0, "MM\x00*", "a TIFF image"},
	{0, "\xd0\xcf\x11\xe0", "an old binary spreadsheet or document (save it as text: comma-separated values)"},
	{0, "\x89HDF\r\n\x1a\n", "an HDF5 file"},
	{0, "\x93NUMPY", "a binary array file"},
	{0, "RIFF", "a RIFF file (sound or film)"},
	{0, "7z\xbc\xaf", "a 7z archive (unpack it first)"},
	{0, "Rar!", "a RAR archive (unpack it first)"},
	{0, "BZh", "a bzip2 file (unpack it first)"},
	{0, "\xfd7zXZ", "an xz file (unpack it first)"},
	{0, "\x28\xb5\x2f\xfd", "a zstd file (unpack it first)"},
	{257, "ustar", "a tar archive (unpack it first)"},
	{0, "\x7fELF", "a program"},
	{0, "MZ", "a program"},
}

// Beginnings of texts that are no tables.
var markups = []struct{ text, what string }{
	{"<!doctype html", "a web page"},
	{"<html", "a web page"},
	{"<?xml", "an XML document"},
	{"{\\rtf", "a word-processor document"},
	{"%!ps", "a PostScript document"},
}

// foreign says in words what the first bytes of a file are when they are not
// text that may hold columns of numbers; "" when they may.
func foreign(head []byte) string {
	if bytes.HasPrefix(head, []byte("PK\x03\x04")) || bytes.HasPrefix(head, []byte("PK\x05\x06")) {
		return zipKind(head)
	}
	for _, s := range signatures {
		if len(head) >= s.at && bytes.HasPrefix(head[s.at:], []byte(s.bytes)) && (len(s.bytes) > 2 || isBinary(head)) {
			return s.what
		}
	}
	text := bytes.ToLower(bytes.TrimSpace(bytes.TrimPrefix(head, []byte{0xef, 0xbb, 0xbf})))
	for _, m := range markups {
		if bytes.HasPrefix(text, []byte(m.text)) {
			return m.what
		}
	}
	if len(text) > 1 && text[0] == '{' && bytes.IndexByte(text, '"') > 0 {
		return "a JSON document"
	}
	if isBinary(head) {
		return "binary data"
	}
	return ""
}

func zipKind(head []byte) string {
	switch {
	case bytes.Contains(head, []byte("[Content_Types].xml")), bytes.Contains(head, []byte("xl/")),
		bytes.Contains(head, []byte("opendocument.spreadsheet")):
		return "a spreadsheet (save it as text: comma-separated values)"
	}
	return "a zip archive (unpack it first)"
}

// isBinary reports control characters that no text holds. UTF-16 is text in
// spite of its zero bytes.
func isBinary(head []byte) bool {
	if bytes.HasPrefix(head, []byte{0xff, 0xfe}) || bytes.HasPrefix(head, []byte{0xfe, 0xff}) ||
		utf16Unmarked(head, 0) || utf16Unmarked(head, 1) {
		return false
	}
	text := bytes.TrimRight(head, "\x00") // room that a file was given and never filled
	if len(text) == 0 {
		return len(head) > 0
	}
	for _, c := range text {
		if c < ' ' && c != '\t' && c != '\n' && c != '\r' && c != '\f' && c != '\v' && c != 0x1a {
			return true
		}
	}
	return false
}
