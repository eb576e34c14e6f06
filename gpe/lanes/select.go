package lanes

import (
	"fmt"
	"os"
	"strings"
)

// Variable is the environment variable that forces a kernel by its name.
const Variable = "TAILRACE_KERNEL"

// KernelError reports a kernel that there is not, here or at all.
type KernelError struct {
	Name      string
	Available []string
}

func (e *KernelError) Error() string {
	return fmt.Sprintf("there is no kernel %q on this machine; there are %s", e.Name, strings.Join(e.Available, ", "))
}

// available lists the kernels that this machine can run, the fastest first.
var available = append(vectorKernels(), &portable)

// active is the kernel that new plans and all sweeps use.
var active = chosen()

// chosen is the kernel that the environment names, or the fastest.
func chosen() *kernel {
	for _, k := range available {
		if k.name == os.Getenv(Variable) {
			return k
		}
	}
	return available[0]
}

// Kernels returns the names of the kernels that this machine can run, the
// fastest first.
func Kernels() []string {
	var names []string
	for _, k := range available {
		names = append(names, k.name)
	}
	return names
}

// CheckKernel returns a *KernelError when the environment variable
// TAILRACE_KERNEL asks for a kernel that this machine cannot run, in which case
// the fastest is used.
func CheckKernel() error {
	want := os.Getenv(Variable)
	if want == "" || want == active.name {
		return nil
	}
	return &KernelError{Name: want, Available: Kernels()}
}

// Kernel returns the name of the kernel in use.
func Kernel() string { return active.name }
