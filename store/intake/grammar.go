package intake

import "fmt"

// plural returns a count with its noun, which takes an s where it is not one.
func plural(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return fmt.Sprintf("%d %ss", n, what)
}

// are returns a count with its noun and the verb to be.
func are(n int, what string) string {
	if n == 1 {
		return "1 " + what + " is"
	}
	return plural(n, what) + " are"
}

// either returns the first text for a count of one, else the second.
func either(n int, one, several string) string {
	if n == 1 {
		return one
	}
	return several
}
