package program

import (
	"fmt"
	"slices"
	"strings"

	celast "github.com/google/cel-go/common/ast"
	"github.com/google/cel-go/common/operators"
	"github.com/google/cel-go/common/types"
)

// inspector walks an expression before it is type-checked: it gathers what is read, words unknown
// names, and finds text literals that no subject can ever have.
type inspector struct {
	*scope
	src   []rune
	tree  *celast.AST
	bound map[string]*attribute // variables of exists and all -> what they range over; nil: something else
	reads map[string]bool
	flaws []flaw
	loops bool

	undeclared []string // fixture kinds that are not declared and resemble none that is
}

func (in *inspector) tell(id int64, found, problem, accepted string) {
	in.flaws = append(in.flaws, flaw{in.offset(id), found, problem, accepted})
}

func (in *inspector) offset(id int64) int {
	at, ok := in.tree.SourceInfo().GetOffsetRange(id)
	if !ok {
		return 0
	}
	return max(0, min(int(at.Start), len(in.src)))
}

func (in *inspector) walk(e celast.Expr) {
	switch e.Kind() {
	case celast.IdentKind:
		in.ident(e)
	case celast.SelectKind:
		in.selection(e)
	case celast.CallKind:
		in.call(e)
	case celast.ListKind:
		for _, x := range e.AsList().Elements() {
			in.walk(x)
		}
	case celast.ComprehensionKind:
		in.comprehension(e)
	case celast.MapKind, celast.StructKind:
		in.tell(e.ID(), "{…}", "a selector makes no values of its own", "compare with a text, a number or a list")
	}
}

func (in *inspector) ident(e celast.Expr) {
	name := e.AsIdent()
	if _, ok := in.bound[name]; ok {
		return
	}
	if name == subjectName {
		in.tell(e.ID(), name, "the subject itself cannot be compared", "name one of its fields: "+in.fieldWords())
		return
	}
	in.tell(e.ID(), shown(name), "no such name", "write subject and one of its fields: "+in.fieldWords()+"; a text stands in single quotes")
}

func (in *inspector) fieldWords() string {
	return anyOf(append(sortedKeys(in.fields), factsField))
}

// resolve finds the field or fact that the expression is; known is false where it is something
// else altogether.
func (in *inspector) resolve(e celast.Expr) (a *attribute, known bool) {
	switch e.Kind() {
	case celast.IdentKind:
		a, known = in.bound[e.AsIdent()]
		return a, known && a != nil
	case celast.SelectKind:
		sel := e.AsSelect()
		if in.isSubject(sel.Operand()) {
			return in.fields[sel.FieldName()], sel.FieldName() != factsField
		}
		if in.isFacts(sel.Operand()) {
			return in.facts[sel.FieldName()], true
		}
	}
	return nil, false
}

func (in *inspector) isSubject(e celast.Expr) bool {
	return e.Kind() == celast.IdentKind && e.AsIdent() == subjectName
}

func (in *inspector) isFacts(e celast.Expr) bool {
	return e.Kind() == celast.SelectKind && e.AsSelect().FieldName() == factsField && in.isSubject(e.AsSelect().Operand())
}

func (in *inspector) selection(e celast.Expr) {
	if in.isFacts(e) {
		in.tell(e.ID(), subjectName+"."+factsField, "the facts are not compared all at once", "name one of them"+in.factWords())
		return
	}
	a, known := in.resolve(e)
	if !known {
		in.walk(e.AsSelect().Operand())
		return
	}
	if a != nil {
		in.reads[a.name] = true
		return
	}
	name := e.AsSelect().FieldName()
	at := in.wordAt(in.offset(e.ID()), name)
	if in.isFacts(e.AsSelect().Operand()) {
		in.flaws = append(in.flaws, flaw{at, shown(subjectName + "." + factsField + "." + name), fmt.Sprintf("no fact %s is declared for a %s", name, in.asks), suggest(name, sortedKeys(in.facts))})
		return
	}
	in.flaws = append(in.flaws, flaw{at, shown(subjectName + "." + name), fmt.Sprintf("a %s has no field %s", in.asks, name), suggest(name, append(sortedKeys(in.fields), factsField))})
}

func (in *inspector) factWords() string {
	if len(in.facts) == 0 {
		return "; none is declared for a " + string(in.asks)
	}
	return ": " + anyOf(sortedKeys(in.facts))
}

// wordAt finds the word at or behind an offset: a field stands behind its dot.
func (in *inspector) wordAt(offset int, word string) int {
	if i := strings.Index(string(in.src[offset:]), word); i >= 0 {
		return offset + len([]rune(string(in.src[offset:])[:i]))
	}
	return offset
}

func (in *inspector) call(e celast.Expr) {
	c := e.AsCall()
	if !slices.Contains(functions, c.FunctionName()) {
		name := c.FunctionName()
		if symbol, ok := operators.FindReverse(name); ok && symbol != "" {
			name = symbol
		} else if name == operators.Index {
			name = "[ ]"
		}
		in.tell(e.ID(), shown(name), "selectors have no such function", "use comparisons, in, has, exists, all, size, startsWith, endsWith and contains")
		return
	}
	if c.IsMemberFunction() {
		in.walk(c.Target())
	}
	for _, arg := range c.Args() {
		in.walk(arg)
	}
	in.literals(c)
}

// comprehension walks exists, exists_one or all, whose variable stands for the elements of a list.
func (in *inspector) comprehension(e celast.Expr) {
	c := e.AsComprehension()
	in.loops = true
	in.walk(c.IterRange())
	_, taken := in.bound[c.IterVar()]
	if c.IterVar() == subjectName || taken {
		in.tell(e.ID(), shown(c.IterVar()), "the name stands for something else already", "give the variable a name of its own")
		return
	}
	over, _ := in.resolve(c.IterRange())
	in.bound[c.IterVar()] = element(over)
	_, nested := in.bound[c.AccuVar()]
	in.bound[c.AccuVar()] = nil
	for _, part := range []celast.Expr{c.AccuInit(), c.LoopCondition(), c.LoopStep(), c.Result()} {
		in.walk(part)
	}
	delete(in.bound, c.IterVar())
	if !nested {
		delete(in.bound, c.AccuVar())
	}
}

// element is one of a list's texts, for the codes that it may be.
func element(of *attribute) *attribute {
	if of == nil || of.typ.Kind() != types.ListKind {
		return nil
	}
	return &attribute{name: of.name, typ: types.StringType, codes: of.codes, read: of.read}
}

var comparisons = []string{
	operators.Equals, operators.NotEquals,
	operators.Less, operators.LessEquals, operators.Greater, operators.GreaterEquals,
}

// literals finds texts that are compared with a field and that it can never have.
func (in *inspector) literals(c celast.CallExpr) {
	args := c.Args()
	switch {
	case slices.Contains(comparisons, c.FunctionName()):
		in.literal(args[0], args[1])
		in.literal(args[1], args[0])
	case c.FunctionName() == operators.In && args[1].Kind() == celast.ListKind:
		for _, x := range args[1].AsList().Elements() {
			in.literal(args[0], x)
		}
	case c.FunctionName() == operators.In:
		in.literal(args[1], args[0])
	}
}

func (in *inspector) literal(field, lit celast.Expr) {
	a, _ := in.resolve(field)
	text, ok := textOf(lit)
	if a == nil || !ok {
		return
	}
	if a.check != nil {
		if problem := a.check(text); problem != "" {
			in.tell(lit.ID(), shown(text), problem, "compare "+subjectName+"."+a.name+" with a day such as '2025-01-31'")
		}
	}
	if a.codes == nil || slices.Contains(a.codes, text) {
		return
	}
	if _, slip := nearest(text, a.codes); a.open && !slip && codePattern.MatchString(text) {
		in.undeclared = append(in.undeclared, text)
	} else {
		in.tell(lit.ID(), shown(text), fmt.Sprintf("%s.%s is never that", subjectName, a.name), suggest(text, a.codes))
	}
}

func textOf(e celast.Expr) (string, bool) {
	if e.Kind() != celast.LiteralKind {
		return "", false
	}
	s, ok := e.AsLiteral().(types.String)
	return string(s), ok
}

// makeDoubles turns whole numbers that stand beside a number fact into doubles: CEL orders the two
// across their types but does not hold 4 equal to 4.0 when it checks types.
func (in *inspector) makeDoubles() {
	celast.PostOrderVisit(in.tree.Expr(), celast.NewExprVisitor(func(e celast.Expr) {
		if e.Kind() != celast.CallKind {
			return
		}
		args := e.AsCall().Args()
		if !slices.ContainsFunc(args, in.isDouble) {
			return
		}
		for _, arg := range args {
			toDouble(arg)
			if arg.Kind() == celast.ListKind {
				for _, x := range arg.AsList().Elements() {
					toDouble(x)
				}
			}
		}
	}))
}

func toDouble(e celast.Expr) {
	if e.Kind() != celast.LiteralKind {
		return
	}
	if n, ok := e.AsLiteral().(types.Int); ok {
		e.SetKindCase(exprs.NewLiteral(e.ID(), types.Double(n)))
	}
}

func (in *inspector) isDouble(e celast.Expr) bool {
	switch e.Kind() {
	case celast.LiteralKind:
		_, ok := e.AsLiteral().(types.Double)
		return ok
	case celast.CallKind:
		arithmetic := []string{operators.Add, operators.Subtract, operators.Multiply, operators.Divide, operators.Negate, operators.Conditional}
		return slices.Contains(arithmetic, e.AsCall().FunctionName()) && slices.ContainsFunc(e.AsCall().Args(), in.isDouble)
	}
	a, _ := in.resolve(e)
	return a != nil && a.typ == types.DoubleType
}

// pinned gives the only texts that the field can have where the expression is true; nil where the
// expression does not say.
func pinned(e celast.Expr, in *inspector, field string) []string {
	if e.Kind() != celast.CallKind {
		return nil
	}
	c := e.AsCall()
	switch c.FunctionName() {
	case operators.LogicalAnd:
		return both(pinned(c.Args()[0], in, field), pinned(c.Args()[1], in, field))
	case operators.LogicalOr:
		a, b := pinned(c.Args()[0], in, field), pinned(c.Args()[1], in, field)
		if a == nil || b == nil {
			return nil
		}
		return append(a, b...)
	case operators.Equals:
		return append(in.texts(field, c.Args()[0], c.Args()[1:]), in.texts(field, c.Args()[1], c.Args()[:1])...)
	case operators.In:
		if c.Args()[1].Kind() == celast.ListKind {
			return in.texts(field, c.Args()[0], c.Args()[1].AsList().Elements())
		}
	}
	return nil
}

// both keeps what two demands on one field have in common.
func both(a, b []string) []string {
	if a == nil {
		return b
	}
	if b == nil {
		return a
	}
	return slices.DeleteFunc(a, func(s string) bool { return !slices.Contains(b, s) })
}

// texts gives the literals that a field is compared with, or nil where it is not that field or
// they are not all literals.
func (in *inspector) texts(field string, e celast.Expr, lits []celast.Expr) []string {
	a, _ := in.resolve(e)
	if a == nil || a.name != field {
		return nil
	}
	out := []string{}
	for _, l := range lits {
		s, ok := textOf(l)
		if !ok {
			return nil
		}
		out = append(out, s)
	}
	return out
}
