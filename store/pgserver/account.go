//go:build unix

package pgserver

import (
	"errors"
	"fmt"
	"os"
	"os/user"
	"strconv"
	"syscall"
)

// account is whom Postgres runs as.
type account struct {
	name string
	uid  int
	gid  int
	// credential is set where the account differs from that of this process.
	credential *syscall.Credential
}

// chooseAccount decides whom Postgres runs as. Not being root, that is the user of this
// process. As root it is the owner of an existing cluster, else the configured user, else the
// owner of the data directory unless that is root, else postgres, else nobody. cluster is
// empty where there is none yet.
func chooseAccount(configured, dataDir, cluster string) (account, error) {
	if uid := os.Geteuid(); uid != 0 {
		owner, err := ownerOf(cluster)
		if err == nil && owner.uid != uid {
			return account{}, fmt.Errorf("the data in %s belong to user %s: start as that user or as root", cluster, owner.name)
		}
		return account{name: nameOf(uid), uid: uid, gid: os.Getegid()}, nil
	}
	who, err := ownerOf(cluster)
	switch {
	case err == nil && who.uid == 0:
		return account{}, fmt.Errorf("%s belongs to root, and Postgres does not run as root: give the folder and all in it to the user that made it (chown -R)", cluster)
	case err == nil:
		return who, nil
	case !errors.Is(err, os.ErrNotExist):
		return account{}, err
	}
	if configured != "" {
		who, err := named(configured)
		if err != nil {
			return account{}, fmt.Errorf("find the user %s, whom Postgres is to run as: %w", configured, err)
		}
		if who.uid == 0 {
			return account{}, fmt.Errorf("user %s is root, and Postgres does not run as root: name another user", configured)
		}
		return who, nil
	}
	if who, err := ownerOf(dataDir); err == nil && who.uid != 0 {
		return who, nil
	}
	for _, name := range []string{"postgres", "nobody"} {
		if who, err := named(name); err == nil {
			return who, nil
		}
	}
	return account{}, errors.New("no user to run Postgres as: it does not run as root, and there is neither a user postgres nor a user nobody; make a user postgres, or start difaudit as an ordinary user")
}

// ownerOf returns the owner of a file as an account.
func ownerOf(path string) (account, error) {
	info, err := os.Stat(path)
	if err != nil {
		return account{}, err
	}
	stat, ok := info.Sys().(*syscall.Stat_t)
	if !ok {
		return account{}, fmt.Errorf("read the owner of %s: this file system does not tell", path)
	}
	if u, err := user.LookupId(strconv.Itoa(int(stat.Uid))); err == nil {
		return accountOf(u)
	}
	// An owner without an entry in the user database runs with the group of the file.
	return newAccount(strconv.Itoa(int(stat.Uid)), stat.Uid, stat.Gid, []uint32{stat.Gid}), nil
}

func named(name string) (account, error) {
	u, err := user.Lookup(name)
	if err != nil {
		return account{}, err
	}
	return accountOf(u)
}

func accountOf(u *user.User) (account, error) {
	uid, err := strconv.ParseUint(u.Uid, 10, 32)
	if err != nil {
		return account{}, fmt.Errorf("read the number of user %s: %w", u.Username, err)
	}
	gid, err := strconv.ParseUint(u.Gid, 10, 32)
	if err != nil {
		return account{}, fmt.Errorf("read the group of user %s: %w", u.Username, err)
	}
	groups := []uint32{uint32(gid)}
	ids, _ := u.GroupIds() // without them the account has its own group only
	for _, id := range ids {
		if g, err := strconv.ParseUint(id, 10, 32); err == nil && g != gid {
			groups = append(groups, uint32(g))
		}
	}
	return newAccount(u.Username, uint32(uid), uint32(gid), groups), nil
}

func newAccount(name string, uid, gid uint32, groups []uint32) account {
	return account{
		name: name, uid: int(uid), gid: int(gid),
		credential: &syscall.Credential{Uid: uid, Gid: gid, Groups: groups},
	}
}

func nameOf(uid int) string {
	if u, err := user.LookupId(strconv.Itoa(uid)); err == nil {
		return u.Username
	}
	return strconv.Itoa(uid)
}
