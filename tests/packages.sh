# Debian packages that building and testing need; sourced by tests/run and demo-lightcurves/run.

build_packages=(
  g++ cmake ninja-build pkg-config
  libceres-dev libeigen3-dev libcfitsio-dev libcli11-dev catch2 libtomlplusplus-dev libfmt-dev libyaml-cpp-dev
  nlohmann-json3-dev libtbb-dev liberfa-dev libhealpix-cxx-dev libcairo2-dev libssl-dev zlib1g-dev libjs-vega
)
test_packages=(
  python3 python3-astropy python3-scipy chromium poppler-utils clang-format clang-tidy
)

# install_missing PACKAGE...: installs those that dpkg does not have, and asks nothing of the network if it has all.
install_missing() {
  local missing=() package
  for package in "$@"; do
    [[ "$(dpkg-query -W -f='${db:Status-Status}' "$package" 2>/dev/null)" == installed ]] || missing+=("$package")
  done
  ((${#missing[@]})) || return 0
  echo "Installing ${missing[*]}"
  local as_root=()
  if ((EUID != 0)); then
    if ! command -v sudo >/dev/null; then
      echo "These packages are missing; install them as root: apt-get install ${missing[*]}" >&2
      return 1
    fi
    as_root=(sudo)
  fi
  "${as_root[@]}" apt-get update -qq
  "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends "${missing[@]}" \
    >/dev/null
}

# build_release ROOT [TARGET...]: configures and builds into ROOT/.build/release; the build's words are shown if it fails.
build_release() {
  local root=$1 log
  shift
  mkdir -p "$root/.build"
  log=$root/.build/build.log
  [[ -e $root/.build/release/build.ninja ]] || echo "Building, which takes some minutes the first time"
  if ! (cd "$root" && cmake --preset release && cmake --build --preset release ${1:+--target "$@"}) >"$log" 2>&1; then
    tail -n 40 "$log" >&2
    echo "The build failed; everything it said is in $log" >&2
    return 1
  fi
}
