# Sourced by app/run.sh and tests/run.sh: installs what is missing of the packages named in its arguments (Debian 12).

install_packages() {
  local missing=() package
  for package in "$@"; do
    dpkg-query -W -f='${Status}' "$package" 2>/dev/null | grep -q 'install ok installed' || missing+=("$package")
  done
  [ "${#missing[@]}" -eq 0 ] && return 0
  if ! command -v apt-get >/dev/null 2>&1 || ! command -v dpkg-query >/dev/null 2>&1; then
    echo "This system has no apt. Install the equivalents of these Debian 12 packages, then run again:" >&2
    printf '  %s\n' "$@" >&2
    return 1
  fi
  local as_root=()
  if [ "$(id -u)" -ne 0 ]; then
    if ! command -v sudo >/dev/null 2>&1; then
      echo "These packages are missing, and there is neither root nor sudo to install them: ${missing[*]}" >&2
      return 1
    fi
    as_root=(sudo)
  fi
  echo "Installing: ${missing[*]}"
  "${as_root[@]}" apt-get update -q &&
    "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -y -q --no-install-recommends "${missing[@]}"
}

# What the programs need to be built and run.
build_packages=(g++ cmake ninja-build ccache qt6-base-dev qt6-svg-dev libqcustomplot-dev
  libgtest-dev libgmock-dev libbenchmark-dev nlohmann-json3-dev libfmt-dev libpugixml-dev
  libcli11-dev libpolyclipping-dev libocct-data-exchange-dev libtbb-dev pkg-config fonts-dejavu-core dpkg-dev file)
# What the tests need besides.
test_packages=(libocct-modeling-data-dev python3 python3-ezdxf python3-numpy python3-scipy bootstrap-icons gmsh-doc locales)
