# Shared by tests/run and demo/run (sourced): the Debian packages, the configuration, the build.
# Sets `root`, the top of the checkout, and `build`.
root="$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)"
build="$root/build"

packages=(build-essential cmake ninja-build ccache libboost-dev libfst-dev libfmt-dev libutf8proc-dev
  nlohmann-json3-dev libcli11-dev catch2 zlib1g-dev hunspell hunspell-tr)

install_missing_packages() {
  command -v dpkg-query >/dev/null || { echo "no Debian packaging here: expecting ${packages[*]} to be installed"; return 0; }
  local missing=() package
  for package in "${packages[@]}"; do
    [[ "$(dpkg-query -W -f='${Status}' "$package" 2>/dev/null)" == *" installed" ]] || missing+=("$package")
  done
  [[ ${#missing[@]} -eq 0 ]] && return 0
  echo "installing ${missing[*]}"
  local as_root=()
  if [[ "$(id -u)" -ne 0 ]]; then
    command -v sudo >/dev/null || { echo "neither root nor sudo: please install ${missing[*]}" >&2; return 1; }
    as_root=(sudo)
  fi
  "${as_root[@]}" apt-get update -qq
  "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends "${missing[@]}"
}

# As many compilers at once as there are cores and memory for (the parser's file takes about 1.5 GB).
job_count() {
  local cores memory
  cores="$(nproc)"
  memory="$(awk '/MemAvailable/ { print int($2 / 1500000) }' /proc/meminfo 2>/dev/null || echo 1)"
  [[ "$memory" -lt 1 ]] && memory=1
  [[ "$memory" -lt "$cores" ]] && echo "$memory" || echo "$cores"
}

# build_targets [target..]: configures once, then builds.
build_targets() {
  local generator=() target targets=()
  # A checkout that was moved: its old configuration names the old place.
  if [[ -f "$build/CMakeCache.txt" ]] && ! grep -qxF "CMAKE_HOME_DIRECTORY:INTERNAL=$root" "$build/CMakeCache.txt"; then
    rm -rf "$build/CMakeCache.txt" "$build/CMakeFiles"
  fi
  if [[ ! -f "$build/CMakeCache.txt" ]] && command -v ninja >/dev/null; then generator=(-G Ninja); fi
  cmake -S "$root" -B "$build" "${generator[@]}" >"$build.log" 2>&1 || { cat "$build.log" >&2; rm -f "$build.log"; return 1; }
  rm -f "$build.log"
  for target in "$@"; do targets+=(--target "$target"); done
  cmake --build "$build" -j "$(job_count)" "${targets[@]}"
}
