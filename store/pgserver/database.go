//go:build unix

package pgserver

import (
	"context"
	"errors"
	"fmt"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgconn"
)

// SQLSTATE codes of Postgres, Appendix A of its manual.
const (
	noSuchDatabase = "3D000"
	badPassword    = "28P01"
)

// ensureDatabase makes the database unless it is there, and shows that the server takes the
// password.
func ensureDatabase(ctx context.Context, at address, password string) error {
	conn, err := pgx.Connect(ctx, at.url(password, databaseName).String())
	if err == nil {
		return conn.Close(ctx)
	}
	var answer *pgconn.PgError
	switch {
	case errors.As(err, &answer) && answer.Code == badPassword:
		return errors.New("connect to the database: the password in the file 'password' of the data directory is not that of the data: put the file back from a copy of the data directory")
	case !errors.As(err, &answer) || answer.Code != noSuchDatabase:
		return fmt.Errorf("connect to the database: %w", err)
	}
	conn, err = pgx.Connect(ctx, at.url(password, "postgres").String())
	if err != nil {
		return fmt.Errorf("connect to make the database: %w", err)
	}
	_, err = conn.Exec(ctx, "CREATE DATABASE "+databaseName)
	if err := errors.Join(err, conn.Close(ctx)); err != nil {
		return fmt.Errorf("make the database: %w", err)
	}
	return nil
}
