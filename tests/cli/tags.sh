# Tags from the lexicon to the rules that ask for them: derive says which reading, and so do check and the trace. The
# language is made up.
source "$(dirname "$0")/common.inc"

cat >"$t/g.tier" <<'END'
tree {
  root > ±son ±syll ±nasal ±cont
  root > Place > •Labial •Coronal •Dorsal
  Dorsal > ±high ±back
}
segments from "ipa" { t k p m n s i u a }
lexicon { stem /tan/ 'rope' loan   stem /pan/ 'net'   suffix /-ka/ strong   suffix /-ka/ weak }
paradigm all { number : SG //  PL /-ka/ }
rule "loans lose n" { where X:[+nasal] #  delete X  only loan }
rule "strong k"     { where X:/k/         delete X  only strong }
data { /tan/ [ta]  /pan/ [pan]  /pan@loan/ [pa]  /pan-ka@weak/ [panka]  /pan-ka/ [pana] ~ [panka] * [pan] }
END

run derive "$t/g.tier" tan pan pan@loan
is_code 0; no_err; is_out 'ta\npan\npa'
run derive "$t/g.tier" pan-ka
is_code 0; is_out 'pana (pan@stem-ka@suffix@strong)\tpanka (pan@stem-ka@suffix@weak)'; has_err '/pan-ka/ has 2 readings'
run derive "$t/g.tier" pan-ka@weak
is_code 0; no_err; is_out 'panka'
run derive "$t/g.tier" --format json pan-ka
has_out '"readings": [{"reading": "pan@stem-ka@suffix@strong", "surface": "pana"}, {"reading": "pan@stem-ka@suffix@weak", "surface": "panka"}]'
run derive "$t/g.tier" --trace pan-ka@strong
is_code 0; has_out 'reading pan@stem-ka@suffix@strong'; has_out 'k deleted'; has_out 'surface       pana'
run check "$t/g.tier"
is_code 0; has_out '5 of 5 rows derived'
run check "$t/g.tier" --format json
has_out '"reading": "pan@stem-ka@suffix@strong"'
run words "$t/g.tier"
is_code 0; has_out 'tan     ta     rope SG'; has_out 'tan-ka  tanka  rope PL'
run recover "$t/g.tier" --from segments --best 200 pa
is_code 0; has_out 'pan@loan'
done_testing
