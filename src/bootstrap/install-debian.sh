#!/bin/sh
# Installs Debian packages without starting any service that comes with them, neither now nor when
# the machine starts again: the tests start servers of their own.
#
#   install-debian.sh <policy file> <package>...
#
# While it runs, the policy file refuses the start of services. A machine that has a policy keeps it;
# ours is removed at the end, or by the next run where this one was killed.
set -eu

policy=$1
shift
mark='# refuses services while heddle installs'

leave() {
  if grep -qsF "$mark" "$policy"; then rm -f "$policy"; fi
}
trap leave EXIT
trap 'exit 129' HUP
trap 'exit 130' INT
trap 'exit 143' TERM

if [ ! -e "$policy" ]; then
  printf '#!/bin/sh\n%s\nexit 101\n' "$mark" >"$policy"
  chmod 755 "$policy"
fi

export DEBIAN_FRONTEND=noninteractive RUNLEVEL=1

# An outdated list is no reason to stop: the install says itself what it cannot get.
apt-get update -q -o Acquire::Languages=none -o Acquire::Retries=3 || true
apt-get install --yes -q --no-install-recommends \
  -o Acquire::Retries=3 \
  -o DPkg::Lock::Timeout=120 \
  -o Dpkg::Options::=--force-unsafe-io \
  -o Dpkg::Options::=--force-confold \
  "$@"

if command -v update-rc.d >/dev/null 2>&1; then
  for package in "$@"; do
    case $package in
      redis-server | postgresql) update-rc.d "$package" disable || true ;;
    esac
  done
fi
