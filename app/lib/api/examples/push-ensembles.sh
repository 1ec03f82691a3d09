#!/bin/sh
# Sends each file as an ensemble of its own, with retries. Sending again is safe: the same bytes with the same answers
# are the same ensemble. Compress with gzip -n: without it the time goes in, and the same structures are other bytes.
#
#   LOWLYING=http://127.0.0.1:3000 sh push-ensembles.sh token.txt SERIES LEVEL UNIT FILE...
#
# token.txt holds one line: Authorization: Bearer lowl_...   LEVEL and UNIT may be "" for structures without energies.
# RETRIES (10, about a quarter of an hour) is how often a file is tried again while nobody answers.
#
# One JSON line a file: file, status (0: no answer), id, outcome, and of what was taken the counts of frames, accepted,
# remarked and held frames, of questions still open and of warnings; null where nothing was taken. Outcomes, and the exit
# code, which is the first of these that any file came to:
#   1 refused   the reason in words goes to standard error; sending the same again does not help
#   4 unsent    nobody answered, or the server could not: run it again later
#   3 waiting   taken, but frames are held or questions are open: look at the ensemble's intake
#   0 taken, remarked (accepted, with remarks or warnings to read)
# 2: the command itself is incomplete; nothing was sent.
set -u
if [ $# -lt 5 ]; then
  echo "usage: sh push-ensembles.sh TOKENFILE SERIES LEVEL UNIT FILE..." >&2
  exit 2
fi
token=$1 series=$2 level=$3 unit=$4
shift 4
answer=$(mktemp) || exit 2
trap 'rm -f "$answer"' EXIT
refused=0 unsent=0 waiting=0

# A text as JSON, whatever a file may be called.
json() {
  TEXT=$1 awk 'BEGIN {
    for (k = 1; k < 32; k++) code[sprintf("%c", k)] = sprintf("\\u%04x", k)
    code["\""] = "\\\""; code["\\"] = "\\\\"
    for (k = 1; k <= length(ENVIRON["TEXT"]); k++) {
      one = substr(ENVIRON["TEXT"], k, 1)
      out = out (one in code ? code[one] : one)
    }
    printf "\"%s\"", out
  }'
}
# A count of the intake, and how often a key stands in the rest of a line; in texts its quotes are escaped.
number() { sed -n 's/.*"intake":{[^[]*"'"$1"'":\([0-9]*\),.*/\1/p' "$answer"; }
keys() { grep -o "\"$1\":" | wc -l | tr -d ' '; }

for file in "$@"; do
  # What the file before was answered is no answer to this one.
  : > "$answer"
  status=0 id="" frames=null accepted=null remarked=null held=null questions=null warnings=null
  # Of a name in quotes curl reads no comma, semicolon or dash as its own.
  case $file in /*) place=$file ;; *) place=./$file ;; esac
  place=$(printf '%s' "$place" | sed 's/["\\]/\\&/g')
  if [ -r "$file" ] && [ ! -d "$file" ] && [ -r "$token" ]; then
    # A cut line, a server that starts anew and 429 are tried again; Retry-After is honoured.
    status=$(curl --silent --output "$answer" --write-out '%{http_code}' \
      --retry "${RETRIES:-10}" --retry-all-errors --retry-max-time 900 -H @"$token" \
      --form-string "series=$series" ${level:+--form-string} ${level:+"level=$level"} \
      ${unit:+--form-string} ${unit:+"energyUnit=$unit"} -F "file=@\"$place\"" \
      "${LOWLYING:-http://127.0.0.1:3000}/api/v1/ensembles") || status=000
  fi
  case $status in
    200 | 201)
      id=$(sed -n 's/^{"id":"\([a-z2-7]*\)".*/\1/p' "$answer")
      frames=$(number frames) accepted=$(number accepted) remarked=$(number remarked) held=$(number held)
      questions=$(keys options < "$answer")
      warnings=$(sed -n 's/.*,"warnings":\[//p' "$answer" | keys code)
      case $held/$questions/$remarked/$warnings in
        0/0/0/0) outcome=taken ;;
        0/0/*) outcome=remarked ;;
        *) outcome=waiting waiting=1 ;;
      esac
      ;;
    429 | 5??) outcome=unsent unsent=1 ;;
    000)
      status=0 outcome=unsent unsent=1
      echo "${file##*/}: not sent. Nobody answered; run this again later." >&2
      ;;
    0)
      outcome=refused refused=1
      echo "${file##*/}: not sent. It, or the file of the token, cannot be read." >&2
      ;;
    *) outcome=refused refused=1 ;;
  esac
  if [ "$status" -ge 300 ]; then
    # The reason in words stands in the problem document.
    cat "$answer" >&2
    echo >&2
  fi
  printf '{"file":%s,"status":%s,"id":"%s","outcome":"%s","frames":%s,"accepted":%s,"remarked":%s,"held":%s,' \
    "$(json "${file##*/}")" "$status" "$id" "$outcome" "$frames" "$accepted" "$remarked" "$held"
  printf '"questions":%s,"warnings":%s}\n' "$questions" "$warnings"
done
[ $refused = 0 ] || exit 1
[ $unsent = 0 ] || exit 4
[ $waiting = 0 ] || exit 3
