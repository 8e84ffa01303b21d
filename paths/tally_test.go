package paths

import "testing"

// encoded are the bytes of a tally.
func encoded(t *testing.T, of *Tally) []byte {
	t.Helper()
	data, err := of.AppendBinary(nil)
	if err != nil {
		t.Fatal(err)
	}
	return data
}
