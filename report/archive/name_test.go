package archive

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"unicode/utf8"
)

// hostile are device names that a file system, a shell or a page could trip over.
// Those reserved by some systems are common knowledge.
var hostile = []string{
	".", "..", "../../etc", "/", "a/b", `a\b`, "a:b", "con", "CON", "nul.txt", "aux", "com1", "lpt9",
	"loop 07", "Loop 07", "LOOP 07", "loop  07", "loop-07", "loop-07 ", " loop-07", "loop.07", "index.html", ".lock", "-rf", "--json",
	strings.Repeat("x", 300), strings.Repeat("x", 301), strings.Repeat("長", 300), "周波数 計", "петля 7", "Петля 7", "حلقة ٧", "लूप ७",
	"e\u0301", "\u00e9", "\u202eevil", "<script>alert(1)</script>", "</script>", "a\nb", "a\x00b", "\xff\xfe", "💡", "   ", "loop-0123456789",
	"=1+1", "%2e%2e", "a'b\"c", "\t",
}

// portable is a folder's name that every file system takes as it stands.
var unportable = regexp.MustCompile(`[<>:"/\\|?*\x00-\x1f. ]|^(?i:con|prn|aux|nul|com[0-9]|lpt[0-9])$`)

func TestFolderOf(t *testing.T) {
	seen := map[string]string{}
	for _, device := range hostile {
		folder := FolderOf(device)
		if unportable.MatchString(folder) || !utf8.ValidString(folder) || len(folder) > 200 || strings.HasPrefix(folder, "-") {
			t.Errorf("%q has the folder %q", device, folder)
		}
		lower := strings.ToLower(folder)
		if other, taken := seen[lower]; taken {
			t.Errorf("%q and %q share the folder %s", device, other, folder)
		}
		seen[lower] = device
		if FolderOf(device) != folder {
			t.Errorf("%q has two folders", device)
		}
	}
	for device, want := range map[string]string{
		"loop-07": `^loop-07$`, "Loop 07": `^loop-07-[0-9a-f]{10}$`, "a/../b": `^a-b-[0-9a-f]{10}$`, "Петля 7": `^петля-7-[0-9a-f]{10}$`,
	} {
		if got := FolderOf(device); !regexp.MustCompile(want).MatchString(got) {
			t.Errorf("%q has the folder %q, want %s", device, got, want)
		}
	}
}

// TestHostileNames files an entry of each and finds every true name again.
func TestHostileNames(t *testing.T) {
	parent := t.TempDir()
	dir := filepath.Join(parent, "archive")
	want := map[string]bool{}
	for _, device := range hostile {
		mustAdd(t, dir, device, 0)
		want[FolderOf(device)] = true
	}
	mustVerify(t, dir, len(hostile))
	all, err := List(dir)
	if err != nil || len(all) != len(hostile) {
		t.Fatalf("%d entries, %v, want %d", len(all), err, len(hostile))
	}
	for _, r := range all {
		delete(want, r.Folder)
		if !strings.ContainsRune(r.Device, utf8.RuneError) && FolderOf(r.Device) != r.Folder {
			t.Errorf("the folder %s holds the device %q", r.Folder, r.Device)
		}
	}
	if len(want) > 0 {
		t.Errorf("no entry in %v", want)
	}
	if around, err := os.ReadDir(parent); err != nil || len(around) != 1 {
		t.Errorf("beside the archive there is %v, %v", around, err)
	}
	page := string(readFile(t, dir, "index.html"))
	if strings.Contains(page, "<script>alert") || strings.Contains(page, "\u202e") || strings.Contains(page, "\x00") {
		t.Error("a device's name got into the page as it is")
	}
}
