# The Debian packages that the project needs, and how the scripts get them. Sourced, not run.

build_packages=(g++ make cmake libeigen3-dev libhdf5-dev libyaml-cpp-dev libcli11-dev libfmt-dev)
test_packages=(catch2 gnuplot-nox python3-jsonschema python3-yaml)
ci_packages=(clang-14 libomp-14-dev dpkg-dev file)

# Installs what is missing of the packages named, and nothing else.
install_packages() {
  local missing=() package as_root=()
  for package in "$@"; do
    dpkg-query -W -f='${db:Status-Status}\n' "$package" 2>/dev/null | grep -qx installed || missing+=("$package")
  done
  if [ ${#missing[@]} -eq 0 ]; then
    echo "== packages: all here ($*)"
    return 0
  fi
  if ! command -v apt-get >/dev/null; then
    echo "There is no apt-get on this system. Install what corresponds to these Debian 12 packages and run this again:" >&2
    echo "  ${missing[*]}" >&2
    return 1
  fi
  if [ "$(id -u)" -ne 0 ]; then
    if ! command -v sudo >/dev/null; then
      echo "These packages are missing, and without sudo this script cannot install them. As root, run" >&2
      echo "  apt-get update && apt-get install ${missing[*]}" >&2
      echo "and then this script again." >&2
      return 1
    fi
    as_root=(sudo)
  fi
  echo "== packages: installing ${missing[*]}"
  # Without a fresh list the install may still work, from an older one.
  "${as_root[@]}" apt-get -q -o DPkg::Lock::Timeout=300 update ||
    echo "   the package list could not be refreshed; trying with the old one" >&2
  if ! "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get -q -y -o DPkg::Lock::Timeout=300 \
    install --no-install-recommends "${missing[@]}"; then
    echo "The packages could not be installed; the lines above say why. Needed: ${missing[*]}" >&2
    return 1
  fi
}
