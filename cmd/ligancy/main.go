// Command ligancy tells which binding mechanisms saturation data support, with
// which constants, and how surely.
package main

import (
	"os"

	"ligancy/cmd/ligancy/internal/cli"
)

func main() {
	os.Exit(cli.Main(cli.System()))
}
