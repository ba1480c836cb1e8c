package cli

import (
	"fmt"
	"strings"
	"testing"

	"maskpair/decompose"
)

// A fault of the program is one line that says so, wherever it came up.
func TestFaultsOfTheProgramAreWorded(t *testing.T) {
	for name, work := range map[string]func() error{
		"a panic":             func() error { panic("index 7") },
		"a panic of a worker": func() error { return fmt.Errorf("layer wire: %w", &decompose.Fault{Msg: "index 7"}) },
		"a panic of a worker that was waited for": func() error { panic(&decompose.Fault{Msg: "index 7"}) },
		"a panic beside": func() error {
			_, err := beside(func() (int, error) { panic("index 7") })()
			return err
		},
	} {
		err := await(t.Context(), work)
		if err == nil || !strings.HasPrefix(err.Error(), "a fault in the program itself: index 7; ") || strings.Contains(err.Error(), "\n") {
			t.Errorf("%s: %v", name, err)
		}
		if statusOf(err) != statusInput {
			t.Errorf("%s: status %d", name, statusOf(err))
		}
	}
}
