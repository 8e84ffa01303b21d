package results_test

import (
	"fmt"
	"io"
	"os"
	"path/filepath"

	"bankfire/cmd/bankfire/internal/results"
)

func Example() {
	dir, err := os.MkdirTemp("", "")
	if err != nil {
		fmt.Println(err)
		return
	}
	defer os.RemoveAll(dir)
	folder, err := results.Open(results.OnDisk{}, filepath.Join(dir, "out"), false)
	if err != nil {
		fmt.Println(err)
		return
	}
	// ... compute ...
	err = folder.Write([]results.File{{Name: results.Summary, Write: func(w io.Writer) error {
		_, err := fmt.Fprintln(w, `{"schema": 1, "program": {"name": "bankfire"}, "files": []}`)
		return err
	}}})
	fmt.Println(err)
	// Output: <nil>
}
