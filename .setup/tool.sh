#!/usr/bin/env bash
# npm run backup, restore, rotate-key: tool.sh NAME ARGUMENTS. What they answer goes to standard output, the preparing to standard error.
set -euo pipefail
cd "$(dirname "$0")/.."
. .setup/prepare.sh

packages=(postgresql)
[ -z "${DATABASE_URL:-}" ] || packages=()
prepare "${packages[@]}" >&2

name=$1
shift
exec node "dist/server/tools/$name.js" "$@"
