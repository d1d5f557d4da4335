// Package web is the pages: one route table, thin handlers, templates and styles. It works without
// JavaScript; every handler parses, asks the book once and shows one struct through one template.
package web
