#!/usr/bin/env bash
# npm start: see README.md. Everything after the build is server/main.ts.
set -euo pipefail
cd "$(dirname "$0")/.."
. .setup/prepare.sh

packages=(postgresql)
[ -z "${DATABASE_URL:-}" ] || packages=()
prepare "${packages[@]}"

# In place of this shell: Ctrl-C and a stop from outside reach the server itself.
exec node dist/server/main.js
