// Package pgserver finds, obtains, starts and guards a private Postgres: the database of an
// installation that was given no DATABASE_URL.
//
// One data directory holds one instance:
//
//	lock          held (flock) by the process that runs the instance; names its process id
//	password      of the role difaudit, readable by its owner only
//	cluster/      the Postgres data, owned by the account Postgres runs as
//	run/          the folder of the Unix socket
//	postgres.log  what Postgres says; statements, their values and their errors are not logged
//
// Postgres runs as a child process. As root it is given another account, because Postgres
// refuses to run as root. On Linux it shuts down by itself when the process that started it
// dies; elsewhere the next start finds it and stops it first.
//
// The package serves Unix systems. On others a DATABASE_URL is needed.
package pgserver
