package main

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"

	"lodebook/cmd/lodebook/scenario"
	"lodebook/models/book"
)

// stage is the demo, served, with a browser that looks at it.
type stage struct {
	*testing.T
	url       string
	site      string
	passwords map[string]string // by role
	names     map[string]string
	b         *book.Book
}

// chromium finds the browser. Where it is required (as in .ci/run) its absence is a failure;
// elsewhere these tests are left out, visibly.
func chromium(t *testing.T) string {
	t.Helper()
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome"} {
		if path, err := exec.LookPath(name); err == nil {
			return path
		}
	}
	if os.Getenv("LODEBOOK_BROWSER") == "required" {
		t.Fatal("no chromium is installed, and LODEBOOK_BROWSER says that it is required")
	}
	t.Skip("no chromium is installed")
	return ""
}

// newStage makes the demo's book and serves it in this process.
func newStage(t *testing.T) *stage {
	t.Helper()
	ctx, stop := context.WithCancel(context.WithoutCancel(t.Context()))
	var words bytes.Buffer
	a := &app{ctx: ctx, stdout: &words, stderr: &words, clock: time.Now}
	b, err := book.Create(ctx, filepath.Join(t.TempDir(), "demo.book"), a.options())
	if err != nil {
		t.Fatal(err)
	}
	signIns, err := makeDemo(a, b)
	if err != nil {
		t.Fatal(err)
	}
	s := &stage{T: t, b: b, site: scenario.Make(demoToday(b.Now())).Code, passwords: map[string]string{}, names: map[string]string{}}
	for _, x := range signIns {
		s.passwords[x.role], s.names[x.role] = x.password, x.name
	}
	url, done := make(chan string, 1), make(chan error, 1)
	flags := &serveFlags{Listen: "127.0.0.1:0"}
	go func() {
		done <- flags.serve(a, b, func(u string) error { url <- u; return nil })
	}()
	select {
	case s.url = <-url:
	case err := <-done:
		t.Fatalf("the demo is not served: %v", err)
	}
	t.Cleanup(func() {
		stop()
		if err := <-done; err != nil {
			t.Errorf("the server ended with %v", err)
		}
		if err := b.Close(); err != nil {
			t.Error(err)
		}
	})
	return s
}

// browser opens a fresh browser profile and signs in.
func (s *stage) browser(path, role string) context.Context {
	s.Helper()
	options := append(chromedp.DefaultExecAllocatorOptions[:],
		chromedp.ExecPath(path), chromedp.NoSandbox, chromedp.DisableGPU,
		chromedp.Flag("disable-quic", true), chromedp.Flag("disable-background-networking", true),
		chromedp.Flag("disable-component-update", true), chromedp.Flag("disable-sync", true),
		chromedp.Flag("hide-scrollbars", true))
	allocated, cancel := chromedp.NewExecAllocator(context.WithoutCancel(s.Context()), options...)
	s.Cleanup(cancel)
	ctx, cancelTab := chromedp.NewContext(allocated)
	s.Cleanup(cancelTab)
	s.do(ctx) // starts the browser, which lives as long as this context
	limited, cancelTime := context.WithTimeout(ctx, 4*time.Minute)
	s.Cleanup(cancelTime)
	s.do(limited, chromedp.EmulateViewport(1360, 1000),
		chromedp.Navigate(s.url+"/sign-in"),
		chromedp.SendKeys(css(`input[name=name]`), s.names[role]),
		chromedp.SendKeys(css(`input[name=password]`), s.passwords[role]+"\r"),
		chromedp.WaitVisible(css(`nav.spine form[action="/sign-out"] button`)))
	return limited
}

// css is what finds elements.
type css = chromedp.CSS

type step = chromedp.Action[chromedp.Void]

func (s *stage) do(ctx context.Context, steps ...step) {
	s.Helper()
	if err := chromedp.Do(ctx, steps...); err != nil {
		s.Fatal(err)
	}
}

// ask runs one action that gives a value.
func ask[T any](ctx context.Context, s *stage, a chromedp.Action[T]) T {
	s.Helper()
	x, err := chromedp.Run(ctx, a)
	if err != nil {
		s.Fatal(err)
	}
	return x
}

// at gives the address of a page of the site.
func (s *stage) at(parts ...string) string {
	return s.url + "/s/" + s.site + "/" + strings.Join(parts, "/")
}

// text reads the text of the page's leaf.
func (s *stage) text(ctx context.Context) string {
	s.Helper()
	return ask(ctx, s, chromedp.Text(css("main.leaf")))
}

// open goes to a page of the site.
func (s *stage) open(ctx context.Context, url string) {
	s.Helper()
	s.do(ctx, chromedp.Navigate(url), chromedp.WaitVisible(css("main.leaf")))
}

// press clicks a button and waits for the page that follows to hold a text.
func (s *stage) press(ctx context.Context, button, want string) {
	s.Helper()
	s.do(ctx, chromedp.Click(css(button)))
	for range 100 {
		text, err := chromedp.Run(ctx, chromedp.Text(css("main.leaf")))
		if err == nil && strings.Contains(text, want) {
			return
		}
		s.do(ctx, pauseAWhile)
	}
	s.Fatalf("after %s the page does not say %q:\n%s", button, want, s.text(ctx))
}

// pauseAWhile lets the browser turn the page.
func pauseAWhile(ctx context.Context, _ *chromedp.Target) (chromedp.Void, error) {
	select {
	case <-ctx.Done():
		return chromedp.Void{}, ctx.Err()
	case <-time.After(50 * time.Millisecond):
		return chromedp.Void{}, nil
	}
}

// says fails unless the page holds every part.
func (s *stage) says(ctx context.Context, parts ...string) {
	s.Helper()
	text := s.text(ctx)
	for _, p := range parts {
		if !strings.Contains(text, p) {
			s.Errorf("the page does not say %q:\n%s", p, text)
		}
	}
}

// view is one way to look at a page.
type view struct {
	name          string
	width, height int64
	scheme        string
}

var views = []view{{"wide", 1360, 1000, "light"}, {"wide-dark", 1360, 1000, "dark"}, {"phone", 360, 780, "light"}, {"phone-dark", 360, 780, "dark"}}

// picture looks at a page in each view: nothing may stick out, and where a folder is named the
// picture is saved.
func (s *stage) picture(ctx context.Context, name, url string) {
	s.Helper()
	dir := os.Getenv("LODEBOOK_PICTURES")
	for _, v := range views {
		_, err := chromedp.Call(ctx, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: v.scheme}}})
		if err != nil {
			s.Fatal(err)
		}
		s.do(ctx, chromedp.EmulateViewport(v.width, v.height))
		s.open(ctx, url)
		if wide := ask(ctx, s, chromedp.Evaluate[int64]("document.documentElement.scrollWidth")); wide > v.width {
			s.Errorf("%s is %d wide where there is room for %d", url, wide, v.width)
		}
		if dir == "" {
			continue
		}
		png := ask(ctx, s, chromedp.FullScreenshot(100))
		if err := os.WriteFile(filepath.Join(dir, fmt.Sprintf("%s-%s.png", name, v.name)), png, 0o600); err != nil {
			s.Fatal(err)
		}
	}
	s.do(ctx, chromedp.EmulateViewport(1360, 1000))
}

// TestBrowser drives the demo as each role would.
func TestBrowser(t *testing.T) {
	path := chromium(t)
	s := newStage(t)
	t.Run("facilities log a failing inspection and see the gap", func(t *testing.T) { s.in(t).failingInspection(path) })
	t.Run("the officer records a session for twelve people", func(t *testing.T) { s.in(t).sessionForTwelve(path) })
	t.Run("the officer corrects a mistake", func(t *testing.T) { s.in(t).correctMistake(path) })
	t.Run("the officer looks at a past day", func(t *testing.T) { s.in(t).pastDay(path) })
	t.Run("a member acknowledges and sees only their own", func(t *testing.T) { s.in(t).member(path) })
	t.Run("a reader reads", func(t *testing.T) { s.in(t).reader(path) })
	t.Run("the administrator adds an account", func(t *testing.T) { s.in(t).administrator(path) })
	t.Run("every page is looked at", func(t *testing.T) { s.in(t).everyPage(path) })
}

// in is the stage for one part of the test.
func (s *stage) in(t *testing.T) *stage {
	x := *s
	x.T = t
	return &x
}

func (s *stage) failingInspection(path string) {
	ctx := s.browser(path, "facilities")
	s.open(ctx, s.at("sheet")+"?record=inspection/door-force&fixture=DOOR-01")
	s.do(ctx, chromedp.SendKeys(css(`input[name=v-force_n]`), "81,5"), chromedp.Click(css(`input[name=v-shield][value=yes]`)))
	s.press(ctx, "#result button", "fails")
	s.says(ctx, "81.5 N", "at most 67 N")
	s.press(ctx, "button[name=keep]", "Kept:")
	s.open(ctx, s.at("gaps"))
	s.says(ctx, "failed", "DOOR-01")
}

func (s *stage) sessionForTwelve(path string) {
	ctx := s.browser(path, "safety officer")
	s.open(ctx, s.at("session")+"?record=training/level-1")
	ask(ctx, s, chromedp.Evaluate[int64](`[...document.querySelectorAll("input[name=people]")].slice(0, 12).map(x => x.click()).length`))
	s.press(ctx, "form.sheet button.ink", "for twelve people.")
	s.open(ctx, s.at("book")+"?kind=record")
	if n := ask(ctx, s, chromedp.Evaluate[int64](`[...document.querySelectorAll("td a")].filter(x => x.textContent.startsWith("Level 1 training, passed")).length`)); n < 12 {
		s.Errorf("%d entries of the session, want 12", n)
	}
}

func (s *stage) correctMistake(path string) {
	ctx := s.browser(path, "safety officer")
	s.open(ctx, s.at("record")+"?record=training/life-support&subject=person:S05")
	s.press(ctx, "form.sheet button.ink", "Kept:")
	s.do(ctx, chromedp.Click(css(".notice a")), chromedp.WaitVisible(css("pre.bytes, details")))
	s.press(ctx, ".acts a.btn:not(.quiet)", "A new entry takes the place of this one.")
	s.do(ctx, chromedp.Click(css(`input[name=result][value=fail]`)))
	s.press(ctx, "form.sheet button.ink", "It took the place of an earlier entry.")
	s.says(ctx, "Before", "Now", "pass", "fail")
}

func (s *stage) pastDay(path string) {
	ctx := s.browser(path, "safety officer")
	day := s.b.Now().AddDate(0, -3, 0).Format("2006-01-02")
	s.open(ctx, s.at("today")+"?on="+day)
	s.says(ctx, "This is how it stood", "Back to today")
	if n := ask(ctx, s, chromedp.Evaluate[int64](`document.querySelectorAll(".lines .do a").length`)); n != 0 {
		s.Errorf("%d forms are offered on a past day", n)
	}
}

func (s *stage) member(path string) {
	ctx := s.browser(path, "member")
	s.says(ctx, "of yours")
	ask(ctx, s, chromedp.Evaluate[string](`document.querySelector('.do a[href*="acknowledge"]').click(), "ok"`))
	s.do(ctx, chromedp.WaitVisible(css("form.sheet button.ink")))
	s.press(ctx, "form.sheet button.ink", "Kept: you have read it.")
	s.open(ctx, s.at("people"))
	s.says(ctx, "Not for this account")
}

func (s *stage) reader(path string) {
	ctx := s.browser(path, "reader")
	s.open(ctx, s.at("gaps"))
	if n := ask(ctx, s, chromedp.Evaluate[int64](`document.querySelectorAll('.lines .do a:not([href*="/remedies/"])').length`)); n != 0 {
		s.Errorf("a reader is offered %d forms", n)
	}
	s.open(ctx, s.at("session"))
	s.says(ctx, "Not for this account")
}

func (s *stage) administrator(path string) {
	ctx := s.browser(path, "administrator")
	s.open(ctx, s.url+"/accounts")
	s.do(ctx, chromedp.SendKeys(css(`input[name=name]`), "otto"), chromedp.SetValue(css(`select[name=role]`), "facilities"))
	s.press(ctx, "form.sheet button.ink", "A link for otto")
	s.says(ctx, "/link/")
}

func (s *stage) everyPage(path string) {
	officer := s.browser(path, "safety officer")
	pages := map[string]string{
		"today": s.at("today"), "week": s.at("week"), "today-past": s.at("today") + "?on=" + s.b.Now().AddDate(0, -2, 0).Format("2006-01-02"),
		"rounds": s.at("rounds"), "round-sheet": s.at("round-sheet"), "fixtures": s.at("fixtures"), "fixture": s.at("fixtures", "VENT-QUAY"),
		"people": s.at("people"), "person": s.at("people", "X01"), "person-data-fault": s.at("people", "X11"), "drills": s.at("drills"), "drill": s.at("drill") + "?crew=night",
		"plan": s.at("plan"), "checklist": s.at("checklist"), "item": s.at("checklist", "TRAIN-LEVEL-2"), "groups": s.at("groups"), "program": s.at("program"),
		"gaps": s.at("gaps"), "gaps-owner": s.at("gaps") + "?by=owner", "book": s.at("book"), "session": s.at("session"), "screening": s.at("screening"),
		"record": s.at("record"), "excuse": s.at("excuse") + "?subject=person:X01", "keep-person": s.at("keep-person") + "?code=S05", "keep-fixture": s.at("keep-fixture") + "?code=VENT-QUAY",
		"import": s.at("import"), "jobs": s.url + "/jobs", "help": s.url + "/help", "sheet": s.at("sheet") + "?record=inspection/vent-full&fixture=VENT-SEA",
	}
	for name, url := range pages {
		s.picture(officer, name, url)
	}
	s.remedyPages(officer, path)
	s.picture(s.browser(path, "member"), "member-today", s.at("today"))
	s.picture(s.browser(path, "facilities"), "facilities-today", s.at("today"))
	admin := s.browser(path, "administrator")
	s.picture(admin, "accounts", s.url+"/accounts")
	s.picture(admin, "account", s.url+"/accounts/"+s.names["facilities"])
}
