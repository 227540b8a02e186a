package watch_test

import (
	"context"
	"errors"
	"fmt"
	"log"
	"os"
	"path/filepath"

	"dieaway/capture/watch"
)

// Wait for the first file that is whole, and stop.
func Example() {
	dir, err := os.MkdirTemp("", "incoming")
	if err != nil {
		log.Fatal(err)
	}
	defer os.RemoveAll(dir)
	if err := os.WriteFile(filepath.Join(dir, "ring.csv"), []byte("0,1\n"), 0o666); err != nil {
		log.Fatal(err)
	}
	enough := errors.New("enough")
	folder := &watch.Folder{Dir: dir}
	err = folder.Run(context.Background(), func(_ context.Context, files []watch.File) error {
		fmt.Println(files[0].Name)
		return enough
	})
	fmt.Println(err)
	// Output:
	// ring.csv
	// enough
}
