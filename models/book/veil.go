package book

import (
	"encoding/json"
	"fmt"
	"io"
	"reflect"
	"slices"
	"strings"

	"lodebook/models/ledger"
	"lodebook/models/store"
)

// Veiled is a value that a person may ask to have forgotten: a name, an address, free text. The
// entry's bytes carry a salted commitment to it; the value and its salt stand in an erasable table.
type Veiled struct {
	Value  string
	salt   []byte
	commit string
	Erased bool
	person string // code of the person whom it is about, for erasure
}

const veilPrefix = "veil:"

// veiled wraps a value that concerns a person (or nobody in particular, where person is empty).
func veiled(value, person string) Veiled { return Veiled{Value: value, person: person} }

// IsZero leaves an absent value out of the entry.
func (v Veiled) IsZero() bool { return v.Value == "" && v.commit == "" }

// String is the value for showing.
func (v Veiled) String() string {
	if v.Erased {
		return erasedText
	}
	return v.Value
}

const erasedText = "(erased)"

// MarshalJSON writes the commitment, never the value.
func (v Veiled) MarshalJSON() ([]byte, error) {
	if v.commit == "" {
		return nil, fmt.Errorf("a veiled value was written before it was sealed")
	}
	return json.Marshal(veilPrefix + v.commit)
}

// UnmarshalJSON reads the commitment; the value is filled in by unveil.
func (v *Veiled) UnmarshalJSON(b []byte) error {
	var s string
	if err := json.Unmarshal(b, &s); err != nil {
		return err
	}
	c, ok := strings.CutPrefix(s, veilPrefix)
	if !ok {
		return fmt.Errorf("%q is no commitment", s)
	}
	v.commit = c
	return nil
}

// walkVeils calls visit for every veiled value below body with its JSON path, in a fixed order.
func walkVeils(body any, visit func(path string, v *Veiled) error) error {
	return walkValue(reflect.ValueOf(body), "", visit)
}

func walkValue(v reflect.Value, path string, visit func(string, *Veiled) error) error {
	switch v.Kind() {
	case reflect.Pointer:
		if v.IsNil() {
			return nil
		}
		return walkValue(v.Elem(), path, visit)
	case reflect.Map:
		return walkMap(v, path, visit)
	case reflect.Struct:
		if v.Type() == reflect.TypeFor[Veiled]() {
			return visit(path, v.Addr().Interface().(*Veiled))
		}
		return walkStruct(v, path, visit)
	default:
		return nil
	}
}

func walkStruct(v reflect.Value, path string, visit func(string, *Veiled) error) error {
	for i := range v.NumField() {
		f := v.Type().Field(i)
		if !f.IsExported() && !f.Anonymous {
			continue
		}
		sub := path
		if !f.Anonymous {
			name, _, _ := strings.Cut(f.Tag.Get("json"), ",")
			sub = join(path, name)
		}
		if err := walkValue(v.Field(i), sub, visit); err != nil {
			return err
		}
	}
	return nil
}

func walkMap(v reflect.Value, path string, visit func(string, *Veiled) error) error {
	keys := v.MapKeys()
	slices.SortFunc(keys, func(a, b reflect.Value) int { return strings.Compare(a.String(), b.String()) })
	for _, k := range keys {
		elem := v.MapIndex(k)
		fresh := reflect.New(elem.Type()).Elem()
		fresh.Set(elem)
		if err := walkValue(fresh, join(path, k.String()), visit); err != nil {
			return err
		}
		v.SetMapIndex(k, fresh)
	}
	return nil
}

func join(path, name string) string {
	if path == "" {
		return name
	}
	return path + "." + name
}

// seal gives every veiled value of the body its salt and commitment and returns the erasable rows.
func seal(body any, random io.Reader) ([]store.Veil, error) {
	var veils []store.Veil
	err := walkVeils(body, func(path string, v *Veiled) error {
		if v.Value == "" {
			return nil
		}
		v.salt = make([]byte, 32)
		if _, err := io.ReadFull(random, v.salt); err != nil {
			return err
		}
		v.commit = ledger.Commit(v.salt, []byte(v.Value))
		veils = append(veils, store.Veil{Path: path, Person: v.person, Salt: v.salt, Value: []byte(v.Value)})
		return nil
	})
	return veils, err
}

// unveil fills the values of a decoded body in from the erasable rows.
func unveil(body any, veils []store.Veil) error {
	byPath := make(map[string]store.Veil, len(veils))
	for _, v := range veils {
		byPath[v.Path] = v
	}
	return walkVeils(body, func(path string, v *Veiled) error {
		row, ok := byPath[path]
		switch {
		case v.commit == "":
		case !ok || row.Erased:
			v.Erased = true
		default:
			v.Value, v.salt, v.person = string(row.Value), row.Salt, row.Person
		}
		return nil
	})
}
