package main

import "runtime/debug"

// version is the module version from the build information, with the revision
// where the program was built from a checkout.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok || info.Main.Version == "" {
		return "(devel)"
	}
	return info.Main.Version
}
