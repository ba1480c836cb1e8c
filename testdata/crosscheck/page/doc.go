// Package page looks at the report page in a real browser: Debian's Chromium, without a window, driven by chromedp.
//
// What a person relies on is checked where it happens: that the page opens from the disk without a word on the console and
// asks nothing of anyone, that there is a card for each kind of thing to mend, that text can be read in light and in dark, that
// the keyboard reaches everything, that a narrow screen shows all, that drawings are to scale.
//
// The JSON of the same layout is held against its schemas, by a validator that nobody here wrote.
//
// With MASKPAIR_SHOTS set to a folder, the tests leave screenshots there, to be looked at.
package page
