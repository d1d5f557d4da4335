package main

import (
	"context"
	"testing"

	"github.com/chromedp/chromedp"
)

// remedyPages looks at the pages about incidents, remedies and what is out of service.
func (s *stage) remedyPages(officer context.Context, path string) {
	for name, url := range map[string]string{
		"incidents": s.at("incidents"), "incident": s.at("incidents", "1"), "incident-report": s.at("incident"), "remedies": s.at("remedies") + "?all=yes", "remedy": s.at("remedies", "1"),
		"remedy-make": s.at("remedy") + "?incident=1&severity=high", "out-of-service": s.at("out-of-service") + "?subject=fixture:VENT-SEA", "back-in-service": s.at("back-in-service") + "?subject=fixture:VENT-QUAY",
		"fixture-out": s.at("fixtures", "VENT-QUAY"),
	} {
		s.picture(officer, name, url)
	}
	s.picture(s.browser(path, "member"), "member-incidents", s.at("incidents"))
}

// TestIncidentInABrowser reports without a name, as a member would, in two taps and a few words.
func TestIncidentInABrowser(t *testing.T) {
	path := chromium(t)
	s := newStage(t)
	ctx := s.browser(path, "member")
	s.open(ctx, s.at("today"))
	s.do(ctx, chromedp.Click(css(`main a[href$="/incident"]`)), chromedp.WaitVisible(css("form.sheet")))
	s.do(ctx, chromedp.SetValue(css("select[name=incident]"), "near-miss"), chromedp.SendKeys(css("textarea[name=what]"), "A steel stool stood by the door of Zone IV."),
		chromedp.Click(css("input[name=severity][value=low]")), chromedp.Click(css("input[name=name][value=no]")))
	s.press(ctx, "form.sheet button.ink", "Received.")
	officer := s.browser(path, "safety officer")
	s.open(officer, s.at("incidents"))
	s.says(officer, "A steel stool", "nobody named")
	s.open(officer, s.at("incidents", "3"))
	s.press(officer, ".acts a.btn:not(.quiet)", "Only safety officers and the owner read")
}
