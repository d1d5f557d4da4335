package scenario

import (
	"slices"

	"lodebook/models/civil"
)

// The firms that the contractors come from; the site's own staff are employed by the site.
const (
	magnetFirm   = "Holmgarth Magnet Service"
	cleaningFirm = "Tidewrack Cleaning"
	airFirm      = "Nordhella Ventilation"
	guardFirm    = "Kestrelgate Watch"
	agency       = "Longstrand Agency Staff"
)

// The people whom a story is about.
const (
	officer       = "S01" // safety officer
	deputy        = "S02" // second safety officer
	director      = "S03" // medical director
	expert        = "S04" // safety expert
	technologist  = "S05"
	facilityHead  = "S20"
	selfReported  = "S12" // reported a change about herself, screened again since
	unread        = "S18" // has not acknowledged a policy
	promoted      = "S25" // went from level 1 to level 2
	limited       = "S29" // cleared with a restriction
	onLeave       = "S30" // on parental leave
	movedCrew     = "S36" // went from the early to the late crew
	nightLead     = "S38"
	excusedPerson = "S41" // excused from a drill
	cameBack      = "S49" // left and came back
	lapsedVisitor = "X01" // contractor whose level 2 training ran out
	waitingOpen   = "X02" // an imported excusal asks to let him in and waits
	certificate   = "X03" // brought a certificate with an end of its own
	newcomer      = "X05" // not screened yet
	researcher    = "S48" // the project is over, and the right with it
	levelUnknown  = "X11" // neither level nor crew on record
)

// person is one member of staff or contractor. Joined and left count in days before today; zero for
// left is still here.
type person struct {
	code, name, job, level, crew, employer string
	joined, left                           int
}

// staff are the site's people: invented, all of them.
var staff = []person{
	{"S01", "Sunniva Dahlgaard", "MR safety officer", "L2", "early", "", 2900, 0},
	{"S02", "Tomasz Wirecki", "lead technologist", "L2", "late", "", 2400, 0},
	{"S03", "Amara Nwachuku-Lind", "radiologist", "L2", "early", "", 3100, 0},
	{"S04", "Henrique Salvaterra", "physicist", "L2", "early", "", 1900, 0},
	{"S05", "Rúni Hvannadal", "technologist", "L2", "early", "", 2100, 0},
	{"S06", "Leila Marzouki-Berg", "technologist", "L2", "early", "", 1650, 0},
	{"S07", "Piotr Zalewny", "technologist", "L2", "early", "", 1200, 0},
	{"S08", "Mei-Ling Osterholm", "technologist", "L2", "early", "", 980, 0},
	{"S09", "João Quintaneiro", "technologist", "L2", "early", "", 840, 0},
	{"S10", "Freyja Sandvatn", "technologist", "L2", "early", "", 410, 0},
	{"S11", "Kwabena Ofosuhene", "technologist", "L2", "early", "", 300, 0},
	{"S12", "Nadia Ilyashkin", "technologist", "L2", "early", "", 1500, 0},
	{"S13", "Bartol Perišin", "technologist", "L2", "early", "", 720, 0},
	{"S14", "Guðrun Eiðisá", "nurse", "L2", "early", "", 1330, 0},
	{"S15", "Samira Benhadou", "nurse", "L2", "early", "", 610, 0},
	{"S16", "Emeka Oduyale", "radiologist", "L2", "early", "", 890, 0},
	{"S17", "Maren Tveitane", "reception", "L1", "early", "", 2200, 0},
	{"S18", "Lucía Barrameda", "reception", "L1", "early", "", 520, 0},
	{"S19", "Dawit Mesele", "porter", "L1", "early", "", 760, 0},
	{"S20", "Jákup Lónheim", "facilities lead", "L2", "early", "", 2600, 0},
	{"S21", "Wanja Kirsebom", "facilities", "L1", "early", "", 480, 0},
	{"S22", "Elif Karadağlı", "technologist", "L2", "late", "", 1780, 0},
	{"S23", "Håkon Brattvær", "technologist", "L2", "late", "", 1410, 0},
	{"S24", "Chiara Montefosco", "technologist", "L2", "late", "", 1110, 0},
	{"S25", "Thandiwe Mkhonza", "technologist", "L2", "late", "", 500, 0},
	{"S26", "Ruben Aasgaard-Lima", "technologist", "L2", "late", "", 930, 0},
	{"S27", "Yuki Hoshizawa", "technologist", "L2", "late", "", 650, 0},
	{"S28", "Mikkel Strømfjord", "technologist", "L2", "late", "", 370, 0},
	{"S29", "Farid Chehrazi", "technologist", "L2", "late", "", 1260, 0},
	{"S30", "Solveig Nattestrand", "technologist", "L2", "late", "", 1580, 0},
	{"S31", "Ana Beatriz Fontoura", "nurse", "L2", "late", "", 700, 0},
	{"S32", "Ikenna Uzodike", "nurse", "L1", "late", "", 440, 0},
	{"S33", "Petra Havlínová", "radiologist", "L2", "late", "", 1700, 0},
	{"S34", "Sigrid Oyarzún", "physicist", "L2", "late", "", 1040, 0},
	{"S35", "Rasmus Tórhamar", "reception", "L1", "late", "", 590, 0},
	{"S36", "Noor van Elsbroek", "porter", "L1", "late", "", 810, 0},
	{"S37", "Bergur Skálamørk", "facilities", "L1", "late", "", 1150, 0},
	{"S38", "Kateryna Dovhal", "lead technologist", "L2", "night", "", 1450, 0},
	{"S39", "Tuomas Rautalahti", "technologist", "L2", "night", "", 1010, 0},
	{"S40", "Lindiwe Zondani", "technologist", "L2", "night", "", 690, 0},
	{"S41", "Edvin Hraunfoss", "technologist", "L2", "night", "", 560, 0},
	{"S42", "Marisol Etxarte", "technologist", "L2", "night", "", 330, 0},
	{"S43", "Olumide Akindayo", "nurse", "L2", "night", "", 870, 0},
	{"S44", "Birita Gásamýri", "nurse", "L1", "night", "", 460, 0},
	{"S45", "Dmitri Kalvaitis", "radiologist", "L2", "night", "", 1290, 0},
	{"S46", "Aino Selkäranta", "porter", "L1", "night", "", 390, 0},
	{"S47", "Haruto Minagawa", "research student", "L1", "early", "", 240, 0},
	{"S48", "Clémence Rouvray-Diop", "researcher", "L1", "late", "", 620, 0},
	{"S49", "Teodor Lupulescu", "researcher", "L1", "early", "", 1100, 330},
	{"S50", "Lene Fagerhus", "technologist", "L2", "late", "", 1900, 130},
	{"S51", "Osei Tawiah-Kron", "porter", "L1", "early", "", 1500, 260},
	{"X01", "Gwilym Trevanion", "magnet engineer", "L2", "early", magnetFirm, 1000, 0},
	{"X02", "Anders Wouterholm", "magnet engineer", "L2", "late", magnetFirm, 640, 0},
	{"X03", "Sibusiso Ndabeni", "magnet engineer", "L2", "early", magnetFirm, 280, 0},
	{"X04", "Rosa Almirón", "cleaner", "L1", "early", cleaningFirm, 900, 0},
	{"X05", "Jerzy Mrozik", "cleaner", "L1", "late", cleaningFirm, 12, 0},
	{"X06", "Hawa Diabaté-Nilsen", "cleaner", "L1", "night", cleaningFirm, 430, 0},
	{"X07", "Óli Vestmýri", "ventilation fitter", "L1", "late", airFirm, 770, 0},
	{"X08", "Sven-Erik Lagerhult", "ventilation fitter", "L1", "early", airFirm, 350, 0},
	{"X09", "Mbali Radeveni", "guard", "L1", "night", guardFirm, 540, 0},
	{"X10", "Donnacha Ó Lonargáin", "guard", "L1", "night", guardFirm, 310, 0},
	{"X11", "Valentina Restrepol", "nurse", "", "", agency, 40, 0},
	{"X12", "İsmail Toprakçı", "technologist", "L2", "night", agency, 210, 0},
}

const employer = "Averhavn Imaging"

func byCode(code string) person {
	i := slices.IndexFunc(staff, func(x person) bool { return x.code == code })
	return staff[i]
}

func nameOf(code string) string { return byCode(code).name }

// worksWithCryogens are those who fill dewars or work on the magnets.
func worksWithCryogens(x person) bool { return x.employer == magnetFirm || x.code == facilityHead }

// phase is a stretch of somebody's time at the site. One that is a change goes on from the phase
// before with other facts; any other begins a stint.
type phase struct {
	first, last civil.Day // LastDay: still here
	level, crew string
	change      bool
}

// phases are the stretches of a person's time at the site, in order.
func phases(a almanac, x person) []phase {
	p := phase{first: a.ago(x.joined), last: civil.LastDay, level: x.level, crew: x.crew}
	if x.left > 0 {
		p.last = a.ago(x.left)
	}
	change := func(from civil.Day, before func(*phase)) []phase {
		was, now := p, p
		before(&was)
		was.last, now.first, now.change = from-1, from, true
		return []phase{was, now}
	}
	switch x.code {
	case promoted:
		return change(a.ago(240), func(was *phase) { was.level = "L1" })
	case movedCrew:
		return change(a.ago(150), func(was *phase) { was.crew = "early" })
	case cameBack:
		again := phase{first: a.ago(75), last: civil.LastDay, level: x.level, crew: x.crew}
		return []phase{p, again}
	}
	return []phase{p}
}
