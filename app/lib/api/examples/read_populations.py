# Populations of an ensemble at a temperature, with nothing but the standard library:
#   LOWLYING=http://127.0.0.1:3000 LOWLYING_TOKEN=lowl_... python3 read_populations.py ENSEMBLE LEVEL 310.15
# Exit code 0: done; 3: done, with warnings on standard error; 1: refused, the reason (JSON) there; 4: nobody answered;
# 2: the command itself is incomplete, nothing was asked.
import json, os, sys, urllib.error, urllib.parse, urllib.request

def call(path, body=None):
    request = urllib.request.Request(os.environ.get("LOWLYING", "http://127.0.0.1:3000") + "/api/v1" + path)
    request.add_header("Authorization", "Bearer " + token)
    request.add_header("Content-Type", "application/json")
    try:
        with urllib.request.urlopen(request, None if body is None else json.dumps(body).encode()) as answer:
            return json.load(answer)
    except urllib.error.HTTPError as refusal:
        print(refusal.read().decode(), file=sys.stderr)
        sys.exit(4 if refusal.code == 429 or refusal.code >= 500 else 1)
    except OSError as away:
        print(json.dumps({"status": 0, "detail": f"Nobody answered: {away}"}), file=sys.stderr)
        sys.exit(4)

def incomplete(reason):
    print(f"{reason}\nusage: LOWLYING_TOKEN=lowl_... python3 read_populations.py ENSEMBLE LEVEL TEMPERATURE", file=sys.stderr)
    sys.exit(2)

if len(sys.argv) != 4:
    incomplete(f"Say which ensemble, which level and the temperature in K: 3 words, found {len(sys.argv) - 1}.")
token = os.environ.get("LOWLYING_TOKEN", "").strip()
if not token:
    incomplete("Put the token into LOWLYING_TOKEN.")
ensemble, level, temperature = sys.argv[1:4]
sift = call(f"/ensembles/{urllib.parse.quote(ensemble, safe='')}/sifts", {"level": level})
while sift["status"] in ("queued", "running"):
    sift = call(f"/sifts/{sift['id']}?wait=30")
query = urllib.parse.urlencode({"temperature": temperature})
answer = call(f"/sifts/{sift['id']}/populations?{query}")
for conformer in answer["conformers"]:
    print(f"{conformer['frame']:6d} {conformer['relativeEnergy']:8.2f} kcal/mol {100 * conformer['population']:5.1f} %")
for warning in answer.get("warnings", []):
    print(json.dumps(warning), file=sys.stderr)
sys.exit(3 if answer.get("warnings") else 0)
