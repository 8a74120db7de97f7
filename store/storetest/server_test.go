package storetest_test

import (
	"sync"
	"testing"

	"github.com/jackc/pgx/v5"

	"difaudit/store/pgserver"
	"difaudit/store/storetest"
)

func TestMain(m *testing.M) { storetest.Main(m) }

func TestServerIsSharedAndAnswers(t *testing.T) {
	t.Parallel()
	servers := make([]*pgserver.Server, 4)
	var wait sync.WaitGroup
	for i := range servers {
		wait.Go(func() { servers[i] = storetest.Server(t) })
	}
	wait.Wait()
	for _, s := range servers {
		if s != servers[0] {
			t.Fatal("two servers in one test binary")
		}
	}
	conn, err := pgx.Connect(t.Context(), servers[0].URL())
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(t.Context())
	var sync string
	if err := conn.QueryRow(t.Context(), "SELECT current_setting('fsync') || ' ' || current_setting('synchronous_commit')").Scan(&sync); err != nil {
		t.Fatal(err)
	}
	if sync != "off on" {
		t.Errorf("fsync and synchronous_commit: %s, want off on", sync)
	}
}
