#!/usr/bin/env bash
# Opens the pages in headless Chromium: the demo's, and those that tests/report.rs wrote. Installs what is missing.
# Usage: tests/page/run.sh [folder for pictures and prints]
set -euo pipefail
cd "$(dirname "$0")/../.."

target="${CARGO_TARGET_DIR:-target}"
work="$target/page"
pictures="${1:-$work/pictures}"
mkdir -p "$work" "$pictures"

as_root=""
if [ "$(id -u)" -ne 0 ]; then as_root="sudo"; fi
missing=""
command -v chromium >/dev/null || missing="$missing chromium"
command -v node >/dev/null || missing="$missing nodejs"
command -v npm >/dev/null || missing="$missing npm"
command -v pdfinfo >/dev/null || missing="$missing poppler-utils"
if [ -n "$missing" ]; then
  $as_root apt-get update -qq
  # shellcheck disable=SC2086  # the list is meant to split
  $as_root apt-get install -y -qq --no-install-recommends $missing
fi
# The driver of the browser, outside the tree; it brings no browser of its own.
driver="playwright-core@1.65.1"
if [ "$(cat "$work/driver" 2>/dev/null)" != "$driver" ]; then
  npm install --silent --no-audit --no-fund --prefix "$work" "$driver"
  echo "$driver" >"$work/driver"
fi

if [ ! -s "$target/tmp/pages/antimeridian.html" ]; then
  cargo test --locked --release --test report
fi
program="${SPALLCAST:-$target/release/spallcast}"
if [ ! -x "$program" ]; then cargo build --locked --release; fi
demo="${DEMO_RESULTS:-}"
if [ -z "$demo" ]; then
  rm -rf "$work/demo"
  "$program" demo "$work/demo"
  demo="$work/demo/results"
fi
node tests/page/browser.mjs "$work" "$demo/report.html" "$target/tmp/pages" "$pictures"
