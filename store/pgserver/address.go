//go:build unix

package pgserver

import (
	"fmt"
	"net"
	"net/url"
	"os"
	"path/filepath"
	"strconv"
	"strings"
)

const (
	roleName     = "difaudit" // owner of the cluster
	databaseName = "difaudit"

	// socketPort is the number in the name of the socket, which no other server shares.
	socketPort = 5432
	// longestSocket is the length in bytes of the longest path every system takes as the
	// address of a socket: 104 with its closing zero on BSD and macOS, 108 on Linux.
	longestSocket = 103
)

// address is where the server listens: a Unix socket in a folder, or a loopback port where
// the folder is empty.
type address struct {
	folder string
	port   int
}

// chooseAddress returns the socket of the data directory, in a folder that only the account
// may enter. It returns a free loopback port where the path of the socket is too long to be an
// address, or holds a comma, at which Postgres and its clients split a list.
func chooseAddress(who account, dataDir string) (address, error) {
	folder := filepath.Join(dataDir, "run")
	socket := filepath.Join(folder, ".s.PGSQL."+strconv.Itoa(socketPort))
	if len(socket) > longestSocket || strings.Contains(socket, ",") {
		l, err := net.Listen("tcp4", "127.0.0.1:0")
		if err != nil {
			return address{}, fmt.Errorf("find a free port: %w", err)
		}
		defer l.Close()
		return address{port: l.Addr().(*net.TCPAddr).Port}, nil
	}
	if err := os.Mkdir(folder, 0o700); err != nil && !os.IsExist(err) {
		return address{}, fmt.Errorf("make the folder of the socket: %w", err)
	}
	if who.credential != nil {
		if err := os.Lchown(folder, who.uid, who.gid); err != nil {
			return address{}, fmt.Errorf("give the folder of the socket to user %s: %w", who.name, err)
		}
	}
	return address{folder: folder, port: socketPort}, nil
}

// settings returns the address as settings of Postgres.
func (a address) settings() []string {
	if a.folder == "" {
		return []string{"listen_addresses=127.0.0.1", "unix_socket_directories=", "port=" + strconv.Itoa(a.port)}
	}
	return []string{"listen_addresses=", "unix_socket_directories=" + a.folder, "unix_socket_permissions=0700", "port=" + strconv.Itoa(a.port)}
}

// url returns the connection URL of a database, password included. Blanks stand as %20,
// which every reader of such URLs knows, and not as a plus sign.
func (a address) url(password, database string) *url.URL {
	u := &url.URL{Scheme: "postgres", User: url.UserPassword(roleName, password), Path: "/" + database}
	query := url.Values{"sslmode": {"disable"}} // the socket and the loopback never leave the machine
	if a.folder == "" {
		u.Host = net.JoinHostPort("127.0.0.1", strconv.Itoa(a.port))
	} else {
		query.Set("host", a.folder)
		query.Set("port", strconv.Itoa(a.port))
	}
	u.RawQuery = strings.ReplaceAll(query.Encode(), "+", "%20")
	return u
}
