//go:build !amd64 || purego

package lanes

// vectorKernels returns none: on this architecture, or with the build tag
// purego, there is only the portable kernel.
func vectorKernels() []*kernel { return nil }
