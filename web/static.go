package web

import (
	"crypto/sha256"
	"embed"
	"encoding/hex"
	"mime"
	"net/http"
	"path"
)

//go:embed static
var staticFiles embed.FS

// static is the styles and scripts, held in memory, and their addresses.
type static struct {
	files  map[string][]byte
	assets assets
}

// assets are the addresses of styles and scripts by file name; they change with the content, so that
// a browser may keep them for good.
type assets map[string]string

// Style and Script are the addresses of a file, for templates.
func (a assets) Style() string { return a["lodebook.css"] }

// Script is the address of a script by its file name.
func (a assets) Script(name string) string { return a[name] }

func readStatic() (static, error) {
	out := static{map[string][]byte{}, assets{}}
	list, err := staticFiles.ReadDir("static")
	if err != nil {
		return out, err
	}
	for _, f := range list {
		data, err := staticFiles.ReadFile("static/" + f.Name())
		if err != nil {
			return out, err
		}
		sum := sha256.Sum256(data)
		out.files[f.Name()] = data
		out.assets[f.Name()] = "/static/" + f.Name() + "?v=" + hex.EncodeToString(sum[:6])
	}
	return out, nil
}

func staticFile(v *visit) error {
	name := v.param("file")
	data, ok := v.files.files[name]
	if !ok {
		return errNoPage
	}
	if v.c.Request.URL.RequestURI() == v.files.assets[name] {
		v.c.Header("Cache-Control", "public, max-age=31536000, immutable")
	}
	v.c.Data(http.StatusOK, mime.TypeByExtension(path.Ext(name)), data)
	return nil
}
