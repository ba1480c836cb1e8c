//go:build !linux

package arena

func take(int) mapping { return mapping{} }

func give(mapping) {}
