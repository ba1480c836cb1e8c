//go:build !linux

package arena

// advise does nothing: the system has no such advice, or gives large pages by itself.
func advise([]byte) {}

// forget does nothing.
func forget([]byte) {}
