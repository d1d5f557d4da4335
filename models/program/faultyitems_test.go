package program

// faultyItems are wrong in their items.
var faultyItems = []refusedFile{
	{"item without keys", vocabulary + "  - {code: X}\n", []string{
		"line 14, column 5: items[0].title: not given; write the demand as a sentence",
		"line 14, column 5: items[0].asks: not given; write one of person, fixture, zone, crew, post, document or site",
		"line 14, column 5: items[0]: no cadence is given; write one of every, within, once, each, after (with within), holds or cover",
		"line 14, column 5: items[0].record: not given; write the records that answer it as kind/code, such as training/level-2",
	}},
	{"item of the wrong type", vocabulary + `  - X
  -
`, []string{
		`line 14, column 5: items[0]: found "X"; write keys and values, as in {code: A}`,
		"line 15, column 5: items[1]: found nothing; write keys and values, as in {code: A}",
	}},
	{"no list", head + "items: {code: X}\n", []string{
		"line 3, column 8: items: found a mapping; write a list of items, each with code, title, asks and a cadence",
	}},
	{"duration", vocabulary + "  - {code: X, title: T, asks: person, record: training/x, every: 1 year, grace: PT5H, notice: [P1D], first: -P1D}\n", []string{
		`line 14, column 66: items[0].every: found "1 year"; write an ISO 8601 duration such as P1Y or P6M`,
		`line 14, column 81: items[0].grace: found "PT5H"; write an ISO 8601 duration such as P1Y or P6M`,
		"line 14, column 95: items[0].notice: found a list; write an ISO 8601 duration such as P1Y or P6M",
		`line 14, column 109: items[0].first: found "-P1D"; write an ISO 8601 duration such as P1Y or P6M`,
	}},
	{"durations of nothing", vocabulary + `  - {code: X, title: T, asks: person, record: training/x, every: P0D}
  - {code: Y, title: T, asks: person, record: training/x, within: P0Y0D}
`, []string{
		`line 14, column 66: items[0].every: found "P0D"; a duration of no days means nothing here; write at least P1D`,
		`line 15, column 67: items[1].within: found "P0Y0D"; a duration of no days means nothing here; write at least P1D`,
	}},
	{"two cadences", vocabulary + "  - {code: X, title: T, asks: person, record: training/x, every: P1Y, once: true, within: P1D}\n", []string{
		`line 14, column 71: items[0].once: found "once"; a second cadence beside every; keep one of the two`,
		`line 14, column 83: items[0].within: found "within"; a second cadence beside every; keep one of the two`,
	}},
	{"once is not false", vocabulary + "  - {code: X, title: T, asks: person, record: training/x, once: false}\n", []string{
		`line 14, column 65: items[0].once: found "false"; an item is either done once or has another cadence; write once: true, or another cadence`,
	}},
	{"after without within", vocabulary + "  - {code: X, title: T, asks: person, record: screening/x, after: [change]}\n", []string{
		"line 14, column 5: items[0].within: not given; write how soon after the event, such as P2D",
	}},
	{"after nothing", vocabulary + "  - {code: X, title: T, asks: person, record: screening/x, after: [], within: P1D}\n", []string{
		"line 14, column 67: items[0].after: found a list; no event would ever ask for it; write a list of events such as [roof-work]",
	}},
	{"after an event of others", vocabulary + "  - {code: X, title: T, asks: person, record: screening/x, after: [quench, chnge, change, change], within: P1D}\n", []string{
		`line 14, column 68: items[0].after[0]: found "quench"; the event happens to a magnet, and the item asks a person; write an event that happens to what the item asks`,
		`line 14, column 76: items[0].after[1]: found "chnge"; there is no such event; did you mean change? write quench, roof-work, storm or change`,
		`line 14, column 91: items[0].after[3]: found "change"; stands in the list twice; keep one of the two`,
	}},
	{"after an event of another kind of fixture", vocabulary + `  - {code: X, title: T, asks: fixture, when: "subject.kind == 'vent'", record: inspection/x, after: [storm, quench], within: P1D}
`, []string{
		`line 14, column 109: items[0].after[1]: found "quench"; the event happens to a magnet, and the item asks a vent; write an event that happens to what the item asks`,
	}},
	{"keys of other cadences", vocabulary + `  - {code: X, title: T, asks: person, record: training/x, once: true, to: month-end, early: P1D, count: 2, days: all}
  - {code: Y, title: T, asks: person, record: training/x, after: [change], within: P1D, first: P1D}
  - {code: Z, title: T, asks: person, holds: "true", first: P1D}
`, []string{
		`line 14, column 71: items[0].to: found "to"; it goes only with every; leave it out`,
		`line 14, column 86: items[0].early: found "early"; it goes only with every; leave it out`,
		`line 14, column 98: items[0].count: found "count"; it goes only with within; leave it out`,
		`line 14, column 108: items[0].days: found "days"; it goes only with each; leave it out`,
		`line 15, column 89: items[1].first: found "first"; it does not go with after, holds or cover; leave it out`,
		`line 16, column 54: items[2].first: found "first"; it does not go with after, holds or cover; leave it out`,
	}},
	{"words", vocabulary + `  - {code: X, title: T, asks: people, record: training/x, every: P1Y, to: monthend}
  - {code: Y, title: T, asks: person, record: training/x, each: fortnight, days: open}
`, []string{
		`line 14, column 31: items[0].asks: found "people"; write person, fixture, zone, crew, post, document or site`,
		`line 14, column 75: items[0].to: found "monthend"; write month-end`,
		`line 15, column 65: items[1].each: found "fortnight"; write day, week, month, quarter or year`,
		`line 15, column 82: items[1].days: found "open"; write all or operating`,
	}},
	{"count", vocabulary + `  - {code: X, title: T, asks: crew, record: drill/x, within: P1Y, count: 0}
  - {code: Y, title: T, asks: crew, record: drill/x, within: P1M, count: 33}
  - {code: Z, title: T, asks: crew, record: drill/x, within: P1W, count: two}
`, []string{
		`line 14, column 74: items[0].count: found "0"; write a whole number from 1 on`,
		`line 15, column 74: items[1].count: found "33"; P1M has at most 32 days, and records of one day count once; write at most 32`,
		`line 16, column 74: items[2].count: found "two"; write a whole number from 1 on`,
	}},
	{"never asked", head + `calendar: {open: []}
items: [{code: X, title: T, asks: site, record: check/x, each: week, days: operating}]
`, []string{
		`line 4, column 76: items[0].days: found "operating"; the calendar has no open weekday, so it is never asked; open a weekday in calendar.open, or write days: all`,
	}},
	{"early is not shorter", vocabulary + `  - {code: X, title: T, asks: person, record: training/x, every: P1M, early: P28D}
  - {code: Y, title: T, asks: person, record: training/x, every: P1Y, early: P12M}
`, []string{
		`line 14, column 78: items[0].early: found "P28D"; it is not shorter than every on every day of the calendar; write a duration shorter than P1M`,
		`line 15, column 78: items[1].early: found "P12M"; it is not shorter than every on every day of the calendar; write a duration shorter than P1Y`,
	}},
	{"records", vocabulary + `  - {code: X, title: T, asks: person, record: training, every: P1Y}
  - {code: Y, title: T, asks: person, record: [lesson/x, training/, training/a, training/a], every: P1Y}
  - {code: Z, title: T, asks: person, record: appointment/MRDO, once: true}
  - {code: W, title: T, asks: person, record: [], once: true}
`, []string{
		`line 14, column 47: items[0].record: found "training"; write kind/code, such as training/level-2`,
		`line 15, column 48: items[1].record[0]: found "lesson/x"; no kind of record is called "lesson"; write training, screening, inspection, check, drill, review, acknowledgement or appointment`,
		`line 15, column 58: items[1].record[1]: found "training/"; no code stands behind the stroke; write a code of letters, digits, - _ and . that begins with a letter or a digit, at most 64 long`,
		`line 15, column 81: items[1].record[3]: found "training/a"; stands in the list twice; keep one of the two`,
		`line 16, column 47: items[2].record: found "appointment/MRDO"; no post has the code "MRDO"; write MRSO`,
		"line 17, column 47: items[3].record: found a list; nothing could answer it; write the records that answer it as kind/code, such as training/level-2",
	}},
	{"sheet of another kind", vocabulary + `  - {code: X, title: T, asks: zone, record: inspection/vent-yearly, every: P1Y}
  - {code: Y, title: T, asks: fixture, when: "subject.kind == 'magnet'", record: check/vent-yearly, each: day}
`, []string{
		`line 14, column 45: items[0].record: found "inspection/vent-yearly"; the sheet is for a vent, and the item asks a zone; write the sheet of what the item asks`,
		`line 15, column 82: items[1].record: found "check/vent-yearly"; the sheet is for a vent, and the item asks a magnet; write the sheet of what the item asks`,
	}},
	{"guards and confers", vocabulary + `  - {code: X, title: T, asks: crew, record: drill/x, every: P1Y, guards: [IV], confers: L1}
  - {code: Y, title: T, asks: person, record: training/x, within: P1Y, guards: [V, IV]}
  - {code: Z, title: T, asks: person, record: training/x, every: P1Y, guards: [IV, IV], confers: L3}
`, []string{
		`line 14, column 66: items[0].guards: found "guards"; only an item that asks a person can do so; leave it out, or write asks: person`,
		`line 14, column 80: items[0].confers: found "confers"; only an item that asks a person can do so; leave it out, or write asks: person`,
		`line 15, column 72: items[1].guards: found "guards"; only an item with every, once or after can guard; leave it out, or give the item one of these cadences`,
		`line 15, column 81: items[1].guards[0]: found "V"; there is no such zone; did you mean IV? write III or IV`,
		`line 16, column 84: items[2].guards[1]: found "IV"; stands in the list twice; keep one of the two`,
		`line 16, column 98: items[2].confers: found "L3"; there is no such level; did you mean L1? write L1 or L2`,
	}},
	{"held in a guard", vocabulary + `  - {code: X, title: T, asks: person, when: "subject.held == 'L1'", record: training/x, every: P1Y, guards: [IV]}
  - {code: Y, title: T, asks: person, when: "subject.held == 'L1'", record: training/x, every: P1Y, confers: L2}
`, []string{
		`line 14, column 45: items[0].when: found "subject.held == 'L1'"; the held level follows from what guards and confers, which therefore cannot read it; read subject.level in its place`,
		`line 15, column 45: items[1].when: found "subject.held == 'L1'"; the held level follows from what guards and confers, which therefore cannot read it; read subject.level in its place`,
	}},
	{"owner", vocabulary + "  - {code: X, title: T, asks: person, record: training/x, every: P1Y, owner: nobody}\n", []string{
		`line 14, column 78: items[0].owner: found "nobody"; there is no such role or post; write facilities, safety-officer or MRSO`,
	}},
	{"item codes taken", vocabulary + `  - {code: X, title: T, asks: person, record: training/x, once: true}
  - {code: X, title: T, asks: person, record: training/x, once: true}
`, []string{
		`line 15, column 12: items[1].code: found "X"; the code is taken on line 14; give each its own code`,
	}},
	{"blank expression", vocabulary + `  - {code: X, title: T, asks: person, when: " ", record: training/x, once: true}
`, []string{
		`line 14, column 45: items[0].when: found " "; the expression is blank; write a CEL expression, or leave the key out`,
	}},
	{"unquoted !", vocabulary + "  - {code: X, title: T, asks: person, when: !has(subject.level), record: training/x, once: true}\n", []string{
		"line 14, column 45: found a tag; a program does without it; leave it out; put a text that begins with ! in quotes",
	}},
	{"nested too deep", "[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[", []string{
		`line 1, column 41: found "["; nested deeper than anything in a program; write it flatter`,
	}},
}
