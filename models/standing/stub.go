package standing

type compiled struct{}

func (c *compiled) fork() *compiled { return c }

type change struct {
	stint, pause, isLast    bool
	fact, what, event, item string
	record                  record
}

func (e *Engine) changed(s *site, l *local, c change)                 {}
func (e *Engine) happenedTo(site string, p *past, l *local, c change) {}
