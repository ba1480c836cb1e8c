//go:build !linux

package arena

func take(int) []byte { return nil }

func give([]byte) {}
