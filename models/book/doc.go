// Package book is the one door to the store: every command (a write) and every query (a read). A
// command checks the actor's permission, validates the input, writes entries with their tree hashes
// and projected rows in one transaction, and brings the evaluator up to date. A query answers from
// the evaluator and the projected rows. Nothing else writes.
package book
