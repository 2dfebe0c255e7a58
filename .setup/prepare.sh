# Sourced by start.sh and test.sh: gets a checkout ready to run, from nothing more than Node.js, npm and apt. Quick where all is there.

say() { printf '%s\n' "$*"; }

# fail WHAT REMEDY
fail() {
  printf '%s\nWhat to do: %s\n' "$1" "$2" >&2
  exit 1
}

# quietly WHAT COMMAND…: what it prints is shown only if it fails.
quietly() {
  local what=$1 log code=0
  shift
  say "$what …"
  log=$(mktemp)
  # Without the lock (8): a service that an installation starts would keep it for as long as it runs.
  "$@" >"$log" 2>&1 </dev/null 8<&- || code=$?
  [ "$code" -eq 0 ] || cat "$log" >&2
  rm -f "$log"
  return "$code"
}

check_node() {
  command -v node >/dev/null || fail 'Node.js is not installed.' 'Install Node.js 20.19 or newer (https://nodejs.org).'
  node -e 'const [major, minor] = process.versions.node.split("."); process.exit(major > 20 || (major == 20 && minor >= 19) ? 0 : 1)' ||
    fail "Node.js $(node --version) is too old." 'Install Node.js 20.19 or newer (https://nodejs.org).'
}

# Two starts in one checkout: the second waits until the first has installed and built. Nothing stale stays behind: a lock ends with its process.
lock_checkout() {
  exec 8<.setup
  flock --nonblock 8 || {
    say 'Another npm start or npm test is preparing this checkout: waiting for it.'
    flock 8
  }
}
unlock_checkout() { exec 8<&-; }

has_postgresql() { [ -x "${PG_BIN:-}/initdb" ] || compgen -G '/usr/lib/postgresql/*/bin/initdb' >/dev/null || command -v initdb >/dev/null; }
# The shell is Chromium without its windows: half the work. Who may not install it goes on with the whole one.
has_chromium_headless_shell() {
  [ -x "${CHROMIUM:-}" ] || command -v chromium-headless-shell >/dev/null ||
    { [ "$(id -u)" -ne 0 ] && command -v chromium chromium-browser google-chrome >/dev/null; }
}
has_socat() { command -v socat >/dev/null; }
has_poppler_utils() { command -v pdftotext >/dev/null && command -v pdftoppm >/dev/null; }

apt_get() { DEBIAN_FRONTEND=noninteractive apt-get -q -o DPkg::Lock::Timeout=120 "$@"; }

# Debian would make a cluster of its own and start it as a service: nobody asked for that one.
install_postgresql() {
  if ! [ -e /etc/postgresql-common/createcluster.conf ]; then
    apt_get install -y --no-install-recommends postgresql-common
    sed -i 's/^#\?create_main_cluster.*/create_main_cluster = false/' /etc/postgresql-common/createcluster.conf
  fi
  apt_get install -y --no-install-recommends postgresql
}

# install_packages NAME…: those that are missing, as named by the distribution.
install_packages() {
  local missing=() name
  for name in "$@"; do "has_${name//-/_}" || missing+=("$name"); done
  [ "${#missing[@]}" -gt 0 ] || return 0
  local remedy="apt-get update && apt-get install -y --no-install-recommends ${missing[*]}"
  command -v apt-get >/dev/null || fail "Missing on this machine: ${missing[*]}." 'Install them with your package manager.'
  [ "$(id -u)" -eq 0 ] || fail "Missing on this machine: ${missing[*]}." "Install them once: sudo sh -c '$remedy'"
  # One unreachable source among several is no reason to give up: the installation tells.
  quietly 'Reading the lists of packages' apt_get update || say 'Not every list could be read: going on with what is there.'
  for name in "${missing[@]}"; do
    if [ "$name" = postgresql ]; then
      quietly "Installing $name" install_postgresql || fail "$name could not be installed." "Try it by hand: $remedy"
    else
      quietly "Installing $name" apt_get install -y --no-install-recommends "$name" || fail "$name could not be installed." "Try it by hand: $remedy"
    fi
    "has_${name//-/_}" || fail "$name was installed, but its programs are not found." 'Look at what this distribution calls them.'
  done
}

# npm writes .package-lock.json last: an installation that was interrupted is done again.
install_node_modules() {
  [ package-lock.json -nt node_modules/.package-lock.json ] || return 0
  # NODE_ENV=production would leave out what builds and tests.
  quietly 'Installing the Node.js packages' npm ci --include=dev --no-progress ||
    fail 'The Node.js packages could not be installed.' 'Is the npm registry reachable? Then try again: npm ci'
}

sources=(cli migrations server shared web index.html package-lock.json package.json tailwind.config.ts tsconfig.build.json tsconfig.json vite.cli.config.ts vite.config.ts)
stamp=dist/.built

# Folders count too: theirs is the only date that a deleted file changes.
needs_build() { [ ! -e "$stamp" ] || [ -n "$(find "${sources[@]}" -newer "$stamp" -print -quit)" ]; }

build() {
  needs_build || return 0
  local began
  began=$(mktemp)
  if ! quietly 'Building' npm run --silent build; then
    rm -f "$began"
    fail 'The build failed.' 'Mend what is named above.'
  fi
  # The date of the beginning: what was saved during the build is built the next time.
  touch -r "$began" "$stamp"
  rm -f "$began"
}

# prepare NAME…: with these packages of the distribution. A function beside_build is called once the packages are there;
# what it starts must not keep the checkout's lock (8<&-).
prepare() {
  check_node
  lock_checkout
  install_packages "$@"
  install_node_modules
  ! declare -F beside_build >/dev/null || beside_build
  build
  unlock_checkout
}
