# Populations of an ensemble at a temperature, with nothing but the standard library:
#   LOWLYING=http://127.0.0.1:3000 LOWLYING_TOKEN=lowl_... python3 read_populations.py ENSEMBLE LEVEL 310.15
import json, os, sys, urllib.parse, urllib.request

def call(path, body=None):
    request = urllib.request.Request(os.environ.get("LOWLYING", "http://127.0.0.1:3000") + "/api/v1" + path)
    request.add_header("Authorization", "Bearer " + os.environ["LOWLYING_TOKEN"])
    request.add_header("Content-Type", "application/json")
    with urllib.request.urlopen(request, None if body is None else json.dumps(body).encode()) as answer:
        return json.load(answer)

ensemble, level, temperature = sys.argv[1:4]
sift = call(f"/ensembles/{ensemble}/sifts", {"level": level})
while sift["status"] in ("queued", "running"):
    sift = call(f"/sifts/{sift['id']}?wait=30")
query = urllib.parse.urlencode({"temperature": temperature})
for conformer in call(f"/sifts/{sift['id']}/populations?{query}")["conformers"]:
    print(f"{conformer['frame']:6d} {conformer['relativeEnergy']:8.2f} kcal/mol {100 * conformer['population']:5.1f} %")
