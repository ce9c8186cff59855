//go:build ignore

// Gen writes RULES.md from the registry.
package main

import (
	"log"
	"os"

	"dewledger/rules"
)

func main() {
	if err := os.WriteFile("RULES.md", []byte(rules.Catalogue()), 0o644); err != nil {
		log.Fatal(err)
	}
}
