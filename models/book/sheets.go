package book

import (
	"context"
	"strings"

	"lodebook/models/program"
)

// SheetForm is a sheet as filled in: the values as typed, by field code.
type SheetForm struct {
	ID      string
	Record  string // inspection/code or check/code
	Fixture string
	On      string
	Values  map[string]string
	Note    string
}

// Verdict is what a filled-in sheet comes to, computed and never typed.
type Verdict struct {
	Result  string // pass or fail
	Remark  bool
	Reasons []string
	OnFail  string // what the sheet says to do
}

// JudgeSheet computes what the sheet would come to, without writing anything. What cannot be judged
// is an *Invalid.
func (b *Book) JudgeSheet(ctx context.Context, actor Actor, site string, f SheetForm) (Verdict, error) {
	if err := actor.may(FillSheet, site); err != nil {
		return Verdict{}, err
	}
	var v Verdict
	err := b.read(ctx, func(m *model) error {
		c := &check{m: m, actor: actor, site: site, now: b.Now()}
		body, verdict, err := c.sheetBody(f)
		if err != nil {
			return err
		}
		v = verdict
		if err := m.mayFill(actor, site, sheetCode(f.Record), c.today()); err != nil {
			return err
		}
		if faults := body.validate(c); len(faults) > 0 {
			return &Invalid{faults}
		}
		return nil
	})
	return v, err
}

// FillSheet puts a filled-in sheet on record with the result that it comes to.
func (b *Book) FillSheet(ctx context.Context, actor Actor, site string, f SheetForm, fix Correction) (Receipt, Verdict, error) {
	var verdict Verdict
	if err := actor.may(FillSheet, site); err != nil {
		return Receipt{}, verdict, err
	}
	receipt, err := b.write(ctx, actor, func(s *session) error {
		body, v, err := s.check(site).sheetBody(f)
		if err != nil {
			return err
		}
		verdict = v
		if err := s.mayRecord(site, body); err != nil {
			return err
		}
		fix.fill(&body.common)
		return s.addRecord(draft{id: f.ID, site: site, supersedes: fix.Supersedes, body: body}, body)
	})
	return receipt, verdict, err
}

func sheetCode(record string) string {
	_, code, _ := strings.Cut(record, "/")
	return code
}

// sheetBody judges the values by the sheet of the version in force today.
func (c *check) sheetBody(f SheetForm) (*recordBody, Verdict, error) {
	sm := c.m.site(c.site)
	if sm == nil {
		return nil, Verdict{}, &NotFound{"site", c.site}
	}
	version := sm.on(c.today())
	sheet, ok := version.program.Sheet(sheetCode(f.Record))
	if !ok {
		return nil, Verdict{}, &NotFound{"sheet", sheetCode(f.Record)}
	}
	judged, bad := sheet.Judge(f.Values)
	body, faults := c.recordBody(RecordForm{Record: f.Record, Subject: "fixture:" + f.Fixture, On: f.On, Note: f.Note})
	for _, x := range bad {
		faults = append(faults, Fault{x.Field, x.Value, x.Problem, x.Accepted})
	}
	if len(faults) > 0 {
		return nil, Verdict{}, &Invalid{faults}
	}
	v := Verdict{Result: Pass, Remark: judged.Remark, Reasons: judged.Reasons}
	if !judged.Passed {
		v.Result, v.Remark, v.OnFail = Fail, false, sheet.OnFail
	}
	body.Result, body.Remark, body.Reasons = v.Result, v.Remark, v.Reasons
	body.Version, body.Values = version.row.Number, sheetValues(sheet, judged.Values)
	return body, v, nil
}

// sheetValues keeps the values as typed, free text veiled.
func sheetValues(sheet *program.Sheet, given map[string]string) map[string]factValue {
	values := map[string]factValue{}
	for _, field := range sheet.Fields {
		text := strings.TrimSpace(given[field.Code])
		switch {
		case text == "":
		case field.Type == program.FieldText:
			values[field.Code] = factValue{Type: string(field.Type), Text: veiled(text, "")}
		default:
			values[field.Code] = factValue{Type: string(field.Type), Value: text}
		}
	}
	return values
}
