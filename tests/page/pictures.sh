#!/usr/bin/env bash
# Makes the pictures of the README: the demo's page in a browser, and one probe. Needs a release build and Chromium.
set -euo pipefail
cd "$(dirname "$0")/../.."
command -v chromium >/dev/null || { apt-get update -qq && apt-get install -y -qq --no-install-recommends chromium; }
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
program=${SPALLCAST:-target/release/spallcast}
"$program" demo "$work/demo" --quiet
mkdir -p docs/pictures
chromium --headless=new --no-sandbox --disable-gpu --no-first-run --disable-background-networking \
  --disable-component-update --disable-sync --hide-scrollbars --user-data-dir="$work/profile" \
  --window-size=1200,1500 --screenshot="$work/page.png" "file://$work/demo/results/report.html" 2>/dev/null
cp "$work/page.png" docs/pictures/page.png
"$program" probe --rock granite --diameter-m 1.5 --exposure crown --draws 512 --plot docs/pictures/probe.png --plot-width-px 1200 \
  >/dev/null
