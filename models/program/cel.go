package program

import (
	"errors"
	"fmt"
	"slices"
	"strings"
	"sync"

	"github.com/google/cel-go/cel"
	celast "github.com/google/cel-go/common/ast"
	"github.com/google/cel-go/common/operators"
	"github.com/google/cel-go/common/types"

	"lodebook/models/civil"
)

const (
	subjectName = "subject"
	typePrefix  = "lodebook." // begins the names of the subjects' types, which no file can use
)

// Bounds of an expression. Only exists and all can take more steps than the expression is long;
// one that holds them runs under a limit of cost.
const (
	maxExpression = 2000 // characters
	maxNesting    = 50
	maxCost       = 20_000
)

// language is the selector language without its variable: a part of CEL without clocks,
// conversions, maps and macros that build lists.
var language = sync.OnceValues(func() (*cel.Env, error) {
	return cel.NewEnv(
		cel.CrossTypeNumericComparisons(true),
		cel.ClearMacros(),
		cel.Macros(cel.HasMacro, cel.AllMacro, cel.ExistsMacro, cel.ExistsOneMacro),
		cel.ParserExpressionSizeLimit(maxExpression),
		cel.ParserRecursionLimit(maxNesting),
	)
})

// functions are what a selector may call. None can fail on what is on record, and none depends on
// a clock.
var functions = []string{
	operators.LogicalAnd, operators.LogicalOr, operators.LogicalNot, operators.NotStrictlyFalse,
	operators.Equals, operators.NotEquals, operators.In, operators.Conditional,
	operators.Less, operators.LessEquals, operators.Greater, operators.GreaterEquals,
	operators.Add, operators.Subtract, operators.Multiply, operators.Divide, operators.Negate,
	"size", "startsWith", "endsWith", "contains",
}

// flaw is a fault inside an expression, at a character of it.
type flaw struct {
	offset                   int
	found, problem, accepted string
}

// CompileSelector compiles a CEL expression over subjects of the kind, by what the program
// declares. The error is a Faults whose lines and columns count within src.
func CompileSelector(p *Program, asks Asks, src string) (*Selector, error) {
	sel, flaws := newScope(p, asks).compile(src)
	if len(flaws) == 0 {
		return sel, nil
	}
	var faults Faults
	for _, f := range flaws {
		before := string([]rune(src)[:f.offset])
		line := strings.Count(before, "\n")
		column := len([]rune(before[strings.LastIndex(before, "\n")+1:]))
		faults = append(faults, Fault{Line: line + 1, Column: column + 1, Found: f.found, Problem: f.problem, Accepted: f.accepted})
	}
	return nil, faults.sorted()
}

// compile is CompileSelector inside a program file.
func (r *reader) compile(n *node, path string, asks Asks) *Selector {
	sel, flaws := r.scope(asks).remembered(n.text)
	for _, f := range flaws {
		line, col := r.inside(n, f.offset)
		r.faults = append(r.faults, Fault{Line: line, Column: col, Path: path, Found: f.found, Problem: f.problem, Accepted: f.accepted})
	}
	return sel
}

func (s *scope) environment() (*cel.Env, error) {
	if s.env != nil {
		return s.env, nil
	}
	base, err := language()
	if err != nil {
		return nil, err
	}
	s.Provider = base.CELTypeProvider()
	s.env, err = base.Extend(cel.CustomTypeProvider(s), cel.Variable(subjectName, cel.ObjectType(s.typeName())))
	return s.env, err
}

// compile parses, inspects and checks an expression; flaws are empty where it can be used.
func (s *scope) compile(src string) (*Selector, []flaw) {
	whole := func(problem, accepted string) (*Selector, []flaw) {
		return nil, []flaw{{found: shown(src), problem: problem, accepted: accepted}}
	}
	if len([]rune(src)) > maxExpression {
		return whole("the expression is too long", fmt.Sprintf("write at most %d characters", maxExpression))
	}
	env, err := s.environment()
	if err != nil {
		return whole(err.Error(), "declare facts that selectors can read")
	}
	parsed, issues := env.Parse(src)
	if issues.Err() != nil {
		return nil, []flaw{syntaxFlaw(src, issues)}
	}
	tree := parsed.NativeRep()
	in := &inspector{scope: s, src: []rune(src), tree: tree, bound: map[string]*attribute{}, reads: map[string]bool{}}
	in.walk(tree.Expr())
	in.makeDoubles()
	checked, issues := env.Check(parsed)
	in.flaws = append(in.flaws, checkFlaws(src, issues, len(in.flaws) > 0)...)
	if len(in.flaws) > 0 {
		return nil, in.flaws
	}
	if !checked.OutputType().IsExactType(types.BoolType) {
		return whole("the expression gives "+typeWord(checked.OutputType().String())+", not true or false", "write a comparison such as "+s.example())
	}
	prog, err := env.Program(checked, in.programOptions()...)
	if err != nil {
		return whole(err.Error(), "write a comparison such as "+s.example())
	}
	sel := NewSelector(strings.TrimSpace(src), sortedKeys(in.reads), matcher(prog))
	sel.undeclared = in.undeclared
	sel.pins = map[string][]string{}
	for _, field := range []string{"kind", "code"} {
		if only := pinned(tree.Expr(), in, field); len(only) > 0 {
			sel.pins[field] = only
		}
	}
	return sel, nil
}

func (s *scope) example() string {
	switch s.asks {
	case AsksPerson:
		return "subject.level == 'L2'"
	case AsksFixture:
		return "subject.kind == 'door'"
	case AsksPost:
		return "size(subject.holders) > 0"
	}
	return "subject.code == 'A'"
}

// matcher runs the compiled expression over one subject.
func matcher(prog cel.Program) func(Subject) (bool, error) {
	return func(sub Subject) (bool, error) {
		v := &view{subject: &sub}
		out, _, err := prog.Eval(v)
		var missing *MissingFact
		switch {
		case errors.As(err, &missing):
			slices.Sort(v.missing)
			return false, &MissingFact{Facts: slices.Compact(v.missing)}
		case err != nil:
			return false, fmt.Errorf("the selector could not be evaluated: %w", err)
		}
		return out == types.True, nil
	}
}

// syntaxFlaw tells the first thing that is no CEL; what the parser makes of the rest is guesswork.
func syntaxFlaw(src string, issues *cel.Issues) flaw {
	e := issues.Errors()[0]
	f := flaw{offset: offsetOf(src, e.Location.Line(), e.Location.Column()), found: shown(src), accepted: "write a CEL expression such as subject.code == 'A'"}
	message := strings.TrimPrefix(e.Message, "Syntax error: ")
	message, _, _ = strings.Cut(message, " expecting ")
	switch {
	case strings.Contains(message, "'<EOF>'"):
		f.problem = "the expression ends too early"
	case strings.HasPrefix(message, "token recognition error"):
		f.problem = "a quote or character that nothing completes"
	default:
		f.problem = "this is not CEL: " + message
	}
	return f
}

// checkFlaws words the type checker's errors. Those of unknown names, and of the subject as a
// whole, the inspector tells better.
func checkFlaws(src string, issues *cel.Issues, inspected bool) []flaw {
	if issues.Err() == nil {
		return nil
	}
	var flaws []flaw
	for _, e := range issues.Errors() {
		told := strings.HasPrefix(e.Message, "undefined field") || strings.HasPrefix(e.Message, "undeclared reference") || strings.Contains(e.Message, typePrefix)
		if told && inspected {
			continue
		}
		problem, accepted := e.Message, "write a CEL expression that gives true or false"
		if p, ok := mismatch(e.Message); ok {
			problem, accepted = p, "compare values of one type; a text stands in single quotes"
		}
		flaws = append(flaws, flaw{offset: offsetOf(src, e.Location.Line(), e.Location.Column()), found: shown(src), problem: problem, accepted: accepted})
	}
	return flaws
}

// mismatch words "found no matching overload for '_==_' applied to '(double, string)'".
func mismatch(message string) (string, bool) {
	rest, ok := strings.CutPrefix(message, "found no matching overload for '")
	name, args, cut := strings.Cut(rest, "' applied to '")
	if !ok || !cut {
		return "", false
	}
	args = strings.NewReplacer("(", "", ")'", "").Replace(strings.Replace(args, "list(", "list\x00", -1))
	words := strings.Split(args, ", ")
	for i, w := range words {
		words[i] = typeWord(strings.Replace(w, "list\x00", "list(", 1))
	}
	if symbol, isOperator := operators.FindReverse(name); isOperator && len(words) == 2 {
		return fmt.Sprintf("%s and %s cannot stand on the two sides of %s", words[0], words[1], symbol), true
	}
	symbol, isOperator := operators.FindReverse(name)
	if !isOperator || symbol == "" {
		symbol = name
	}
	return fmt.Sprintf("%s does not take %s", symbol, strings.Join(words, " and ")), true
}

// offsetOf turns a line (from 1) and a column (from 0) of the expression into a place among its
// characters.
func offsetOf(src string, line, column int) int {
	offset := 0
	for l := range strings.SplitSeq(src, "\n") {
		if line--; line <= 0 {
			break
		}
		offset += len([]rune(l)) + 1
	}
	return max(0, min(offset+column, len([]rune(src))))
}

// notADay tells why a text compared with a day cannot be meant.
func notADay(s string) string {
	if _, err := civil.ParseDay(s); err != nil {
		return "not a day, written YYYY-MM-DD"
	}
	return ""
}

func (in *inspector) programOptions() []cel.ProgramOption {
	options := []cel.ProgramOption{cel.EvalOptions(cel.OptOptimize)}
	if in.loops {
		options = append(options, cel.CostLimit(maxCost))
	}
	return options
}

var exprs = celast.NewExprFactory()
