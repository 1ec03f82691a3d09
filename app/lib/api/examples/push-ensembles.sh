#!/bin/sh
# Sends each file as an ensemble of its own, with retries. Sending again is safe: the same bytes with the same answers
# are the same ensemble. One JSON line a file; exit code 0 when all were taken, 1 when some were not.
#
#   LOWLYING=http://127.0.0.1:3000 sh push-ensembles.sh token.txt SERIES LEVEL UNIT FILE...
#
# token.txt holds one line: Authorization: Bearer lowl_...
# RETRIES (10, about a quarter of an hour) is how often a file is tried again while nobody answers.
set -u
token=$1 series=$2 level=$3 unit=$4
shift 4
answer=$(mktemp)
trap 'rm -f "$answer"' EXIT
failed=0
for file in "$@"; do
  # What the file before was answered is no answer to this one.
  : > "$answer"
  # A cut line, a server that starts anew and 429 are tried again; Retry-After is honoured.
  status=$(curl --silent --output "$answer" --write-out '%{http_code}' \
    --retry "${RETRIES:-10}" --retry-all-errors --retry-max-time 900 \
    -H @"$token" -F "series=$series" -F "level=$level" -F "energyUnit=$unit" -F "file=@$file" \
    "${LOWLYING:-http://127.0.0.1:3000}/api/v1/ensembles") || true
  id=$(sed -n 's/^{"id":"\([a-z2-7]*\)".*/\1/p' "$answer" | head -n 1)
  case $status in
    200 | 201) ;;
    [45]??)
      failed=1
      # The reason in words stands in the problem document.
      cat "$answer" >&2
      echo >&2
      ;;
    *)
      failed=1 status=0
      echo "${file##*/}: not sent. Nobody answered, or the file cannot be read; run this again later." >&2
      ;;
  esac
  printf '{"file":"%s","status":%s,"id":"%s"}\n' "${file##*/}" "$status" "$id"
done
exit $failed
