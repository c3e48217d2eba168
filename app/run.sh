#!/usr/bin/env bash
# Installs what is missing, builds, and opens the window on a sample (or on the drawings given as arguments).
set -euo pipefail
top=$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)
source "$top/app/install_packages.sh"
install_packages "${build_packages[@]}"

cd "$top"
cmake --preset release -DKAPPAFEED_TESTS=OFF -B .build/run >.build-log 2>&1 || { cat .build-log >&2; rm -f .build-log; exit 1; }
rm -f .build-log
cmake --build .build/run --target kappafeed kfeed
cd - >/dev/null

sample="$top/samples/gasket.dxf"
limits="$top/samples/limits/example-router.json"
if [ -z "${DISPLAY:-}" ] && [ -z "${WAYLAND_DISPLAY:-}" ] && [ -z "${QT_QPA_PLATFORM:-}" ]; then
  echo "There is no display, so no window can open. The same sample through the command line:"
  exec "$top/.build/run/bin/kfeed" plan "${@:-$sample}" --limits "$limits"
fi
exec "$top/.build/run/bin/kappafeed" --limits "$limits" "${@:-$sample}"
