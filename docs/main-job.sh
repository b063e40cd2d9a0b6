#!/usr/bin/env bash
# The main job with curl and jq: from an API token to posterior samples.
#
#   TOKEN=$(npm run token -- --email analyst@demo.beatnote.example)
#   TOKEN=$TOKEN bash docs/main-job.sh points.csv mocks.csv results
#
# Set BEATNOTE_URL where the program isn't at http://127.0.0.1:3000. GROUP names the group; default: the first of yours.
set -euo pipefail
points=${1:?the file with the binned measurement}
mocks=${2:?the file with the mocks, one row a mock}
folder=${3:-results}
api=${BEATNOTE_URL:-http://127.0.0.1:3000}/api/v1
: "${TOKEN:?an API token, from npm run token}"

call() { # METHOD PATH [curl's arguments]: the answer's body; an error prints the program's own words and ends the script
  local method=$1 path=$2 answer code
  shift 2
  answer=$(curl --silent --show-error --request "$method" --header "Authorization: Bearer $TOKEN" \
    --write-out '\n%{http_code}' "$@" "$api$path")
  code=${answer##*$'\n'}
  answer=${answer%$'\n'*}
  if ((code >= 400)); then
    jq -r '.error | .message, (.details[]? | "  " + ([.path, (if .line then "line \(.line)" else empty end), .message]
      | map(select(. != null)) | join(": ")))' <<<"$answer" >&2
    exit 1
  fi
  printf '%s\n' "$answer"
}
json() { call "$1" "$2" --header 'Content-Type: application/json' --data "$3"; }

group=${GROUP:-$(call GET /me | jq -r '.groups[0].id')}

# The measurement: columns are recognised by name; the answer lists every check that was made.
measurement=$(call POST "/groups/$group/measurements" --form "file=@$points" --form "mocks=@$mocks")
jq -r '"\(.rows) bins, \(.kappaMin) <= kappa <= \(.kappaMax)", (.checks[] | "  \(.level)\t\(.message)")' <<<"$measurement"

# A notebook on it: one field with a free phase over a smooth background, bins up to kappa = 0.2.
notebook=$(json POST "/groups/$group/notebooks" "$(jq -n --arg measurement "$(jq -r .id <<<"$measurement")" '{
  title: "One field, from a script",
  measurement: $measurement,
  cuts: { kappaMax: 0.2 },
  template: { id: "free-phase", options: { fields: 1, amplitudes: "quadrature", background: [1, 2, 3] } },
  priors: { mu1: { kind: "uniform", lo: 0.2, hi: 8 } }
}')" | jq -r .id)

# The fit: it goes on by itself; this looks at it once a second.
fit=$(json POST "/notebooks/$notebook/fits" '{ "seed": 20270310, "maxDraws": 20000 }' | jq -r .id)
while :; do
  state=$(call GET "/fits/$fit")
  status=$(jq -r .status <<<"$state")
  jq -r '"\(.status)\t\(.progress.draws) draws a replica"' <<<"$state"
  case $status in converged | stopped | budget-spent) break ;; failed) jq -r .message <<<"$state" >&2; exit 1 ;; esac
  sleep 1
done
jq -r '.diagnostics[] | "\(.parameter)\t\(.mean) +- \(.sd)\tR-hat \(.rhat)\tESS \(.essBulk)"' <<<"$state"

mkdir -p "$folder"
call GET "/fits/$fit/manifest" >"$folder/manifest.json"
curl --silent --show-error --fail --header "Authorization: Bearer $TOKEN" "$api/fits/$fit/samples?format=csv" >"$folder/samples.csv"
echo "$(jq -r '.outputs[] | select(.name == "samples.csv") | .sha256' "$folder/manifest.json")  $folder/samples.csv" | sha256sum --check
