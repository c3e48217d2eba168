#!/usr/bin/env bash
# Installs what is missing, builds everything, and runs all tests, the window's too (offscreen).
set -euo pipefail
top=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)
source "$top/app/install_packages.sh"
install_packages "${build_packages[@]}" "${test_packages[@]}"

export QT_QPA_PLATFORM=offscreen
export XDG_RUNTIME_DIR=${XDG_RUNTIME_DIR:-$(mktemp -d)}
chmod 700 "$XDG_RUNTIME_DIR"
cd "$top"
cmake --preset release
cmake --build --preset release
ctest --preset release -j2 "$@"
