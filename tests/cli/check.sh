# check: the planted row of demo/sketch.tsv is found and explained; formats, totals, exit codes.
source "$(dirname "$0")/common.inc"
survey="$TIERSMITH_SOURCE/demo/sketch.tsv"

run check "$velmari"
is_code 0; has_out '5 of 5 rows derived, 0 failed'
run check "$velmari" "$survey"
is_code 1
has_out '32 of 33 rows derived, 1 failed'
has_out '/un-koɡ-lA/'; has_out 'expected  [unkoɡla]'; has_out 'derived   [uŋkoɡla]'
has_out "first went wrong at rule 'nasal place'"
has_out 'sketch.tsv:28:'
run check "$velmari" "$survey" --without 'nasal place'
is_code 1; has_out '/sonp-lA/'

# A row that no single rule mends: harmony is right for the first suffix and not for the second.
printf 'surface\tunderlying\nkoɡlati\tkoɡ-lA-tI\n' >"$t/two.tsv"
run check "$velmari" "$t/two.tsv"
is_code 1; has_out "went wrong at rule 'back harmony', the last that changed the first segment that differs (ɯ for i)"
# A segment that no rule touched.
printf 'underlying\tsurface\ntalu\ttali\n' >"$t/none.tsv"
run check "$velmari" "$t/none.tsv"
is_code 1; has_out 'no rule changed the first segment that differs (u for i): a rule is missing or did not apply'
# One that was deleted, one that was inserted; both mended by leaving one rule out.
printf 'underlying\tsurface\nmohl-lA\tmohlla\nlekt\tlekt\n' >"$t/gaps.tsv"
run check "$velmari" "$t/gaps.tsv"
is_code 1; has_out "at rule 'h loss'"; has_out "at rule 'final vowel'"; has_out '0 of 2 rows derived, 2 failed'

# Unreadable forms are failing rows with their place; a sign the grammar lacks in the expected form is said.
printf 'underlying\tsurface\nta8\tta\ntalu\ttalʙu\n' >"$t/bad.tsv"
run check "$velmari" "$t/bad.tsv"
is_code 1; has_err 'bad.tsv:2:3: error: '; has_out '0 of 2 rows derived, 2 failed'; has_out 'U+0299'

run check "$velmari" "$survey" --format tsv
is_code 1; [[ "$(wc -l <"$t/.out")" -eq 34 ]] || fail "a line for each row and the heading"
has_out $'un-koɡ-lA\tunkoɡla\tuŋkoɡla\tfail\tone-rule\tnasal place\t'
run check "$velmari" "$survey" --format json
is_code 1; has_out '"failed": 1'; has_out '"rule": "nasal place"'
# What the README of a ruleset says is printed.
for readme in "$TIERSMITH_RULESETS"/*/README.md; do
  said="$(grep -o '[0-9]* of [0-9]* rows derived, [0-9]* failed' "$readme")" || continue
  folder="$(dirname "$readme")"
  run check "$folder/$(basename "$folder").tier"
  is_code 0; has_out "$said"
  checked=$((${checked:-0} + 1))
done
[[ "${checked:-0}" -ge 5 ]] || fail "five rulesets at least say so"

run check "$velmari" "$t/absent.tsv"
is_code 3; has_err 'absent.tsv'
done_testing
