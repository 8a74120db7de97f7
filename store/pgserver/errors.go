package pgserver

import "errors"

var (
	// ErrInUse means that another process runs the instance of this data directory.
	ErrInUse = errors.New("the data directory is in use")
	// ErrNotInstalled means that no usable Postgres programs were found.
	ErrNotInstalled = errors.New("no usable Postgres found")
	// ErrOtherVersion means that the data were made by a major version of Postgres whose
	// programs are not here.
	ErrOtherVersion = errors.New("the data belong to another major version of Postgres")
	// ErrUnreachable means that the account Postgres runs as cannot reach a folder it needs.
	ErrUnreachable = errors.New("a folder is closed to the account Postgres runs as")
)
