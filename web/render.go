package web

import (
	"bytes"
	"embed"
	"fmt"
	"html/template"
	"strings"
)

//go:embed templates/*.html
var templateFiles embed.FS

// page is what every page has; each page's struct embeds it.
type page struct {
	Title   string
	Section string // the link of the spine that the page belongs to
	Spine   *spine // nil for somebody who is not signed in
	Notice  *notice
	AsOf    *asOf // nil: the page shows no standings
	Assets  assets
}

func (p *page) head() *page { return p }

// leafOf names the template that shows a struct. Every template but the layout and the partials (whose
// names begin with an underscore) has one; a test fills each struct and executes each template.
func leafOf[T any, P interface {
	*T
	head() *page
}](name string) leaf[T, P] {
	leaves[name] = func() any { return new(T) }
	return leaf[T, P]{name}
}

// leaves is filled while the package starts and only read after.
var leaves = map[string]func() any{}

type leaf[T any, P interface {
	*T
	head() *page
}] struct{ name string }

// show writes the page. Nothing is written when the template fails.
func (l leaf[T, P]) show(v *visit, status int, data P) error {
	if err := v.dress(data.head()); err != nil {
		return err
	}
	var buf bytes.Buffer
	if err := v.leaves[l.name].ExecuteTemplate(&buf, "layout", data); err != nil {
		return fmt.Errorf("page %s: %w", l.name, err)
	}
	if v.proof != nil {
		*v.proof = proof{status, buf.Bytes()}
		return nil
	}
	v.send(proof{status, buf.Bytes()})
	return nil
}

// dress fills in what every page has. Whoever is not signed in sees no spine.
func (v *visit) dress(p *page) error {
	p.Notice = v.takeNotice()
	p.Assets = v.files.assets
	if v.actor.Account == "" {
		return nil
	}
	var err error
	p.Spine, err = v.spine(p.Section)
	return err
}

type templates map[string]*template.Template

// parseTemplates reads every template with the layout and the partials beside it.
func parseTemplates() (templates, error) {
	base, err := template.New("").Funcs(funcs).ParseFS(templateFiles, "templates/_*.html")
	if err != nil {
		return nil, err
	}
	out := templates{}
	for name := range leaves {
		t, err := base.Clone()
		if err != nil {
			return nil, err
		}
		if out[name], err = t.ParseFS(templateFiles, "templates/"+name+".html"); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// funcs are pure: what differs by request is in the page's struct.
var funcs = template.FuncMap{
	"disc":   disc,
	"number": number,
	"digits": func(n int) string { return grouped(int64(n)) },
	"upper":  upperFirst,
	"join":   strings.Join,
	"faults": faultList,
}
