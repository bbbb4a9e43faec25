#!/usr/bin/env bash
# Installs what the tests need, builds everything once and runs every test.
# The last line is "N passed, N failed, N skipped"; the exit code is 0 only when nothing failed.
set -uo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."
export DOTNET_CLI_TELEMETRY_OPTOUT=1 DOTNET_NOLOGO=1 DOTNET_CLI_UI_LANGUAGE=en

passed=0 failed=0 skipped=0
sum_up() {
  echo "$passed passed, $failed failed, $skipped skipped"
  [ "$failed" -eq 0 ]
  exit
}

if ! command -v dotnet >/dev/null; then
  echo "dotnet was not found: install the .NET 10 SDK and run this again." >&2
  failed=1
  sum_up
fi

# The browser tests need a browser that is installed; on Debian, as root, it is fetched here.
browser() {
  for name in chromium chromium-browser google-chrome google-chrome-stable chrome microsoft-edge msedge; do
    command -v "$name" && return
  done
  for place in "/Applications/Google Chrome.app/Contents/MacOS/Google Chrome" "/Applications/Chromium.app/Contents/MacOS/Chromium" \
    "/Applications/Microsoft Edge.app/Contents/MacOS/Microsoft Edge" "/c/Program Files/Google/Chrome/Application/chrome.exe" \
    "/c/Program Files (x86)/Microsoft/Edge/Application/msedge.exe"; do
    [ -x "$place" ] && echo "$place" && return
  done
  return 1
}
if ! browser >/dev/null; then
  if command -v apt-get >/dev/null && [ "$(id -u)" -eq 0 ]; then
    echo "No Chrome, Edge or Chromium found: installing chromium for the browser tests."
    { apt-get update -q && DEBIAN_FRONTEND=noninteractive apt-get install -yq --no-install-recommends chromium; } >/dev/null ||
      echo "chromium could not be installed; the browser tests will say so." >&2
  else
    echo "No Chrome, Edge or Chromium found: install one of them, or the browser tests fail." >&2
  fi
fi

if ! dotnet build Gaugeyard.slnx --configuration Release --nologo --verbosity quiet; then
  echo "The solution does not build; no test was run." >&2
  failed=1
  sum_up
fi

log=$(mktemp)
trap 'rm -f "$log"' EXIT
# the browser tests are the longest and come last
projects=$(ls -d tests/*.Tests | grep -v Browser; ls -d tests/*Browser.Tests)
for project in $projects; do
  name=$(basename "$project")
  echo "--- $name"
  try() { (cd "$project" && dotnet "bin/Release/net10.0/$name.dll" --no-ansi --progress off) >"$log" 2>&1; }
  try
  code=$?
  # a browser on a busy machine may miss a deadline once; what fails twice has failed
  if [ "$code" -ne 0 ] && [[ "$name" == *Browser* ]]; then
    grep '^failed' "$log"
    echo "$name failed and is tried once more."
    try
    code=$?
  fi
  figure() { sed -nE "s/^ *$1: *([0-9]+).*/\1/p" "$log" | tail -n 1; }
  ok=$(figure succeeded) bad=$(figure failed) left=$(figure skipped)
  passed=$((passed + ${ok:-0})) failed=$((failed + ${bad:-0})) skipped=$((skipped + ${left:-0}))
  if [ "$code" -ne 0 ]; then
    cat "$log"
    if [ "${bad:-0}" -eq 0 ]; then
      echo "$name ended with code $code without naming a failed test; counted as one failure." >&2
      failed=$((failed + 1))
    fi
  else
    sed -n '/^Test run summary/,$p' "$log"
  fi
done
sum_up
