// Package reach tells who is entitled to which zone, and when, to the instant; and holds against it what the doors
// and the badges say. It is pure: it reads no clock and touches no store.
//
// A person is entitled to a zone while a right is in force, they are on staff and not paused, at least one item that
// guards the zone is asked of them, and every such item is open. Package standing says what opens an item; here are
// the spans of time that follow.
package reach
