package main

import "lodebook/models/program"

type schemaCommand struct{}

// Run prints the JSON Schema of the program file.
func (c *schemaCommand) Run(a *app) error {
	_, err := a.stdout.Write(program.Schema())
	return err
}
