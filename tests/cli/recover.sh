# recover: candidates, columns, infinite sets, no candidate. Expectations follow from the rules of demo/sketch.tier:
# [kok] may be /kok/ or, by final devoicing, /koɡ/; h is lost before consonants, so there is no end of candidates.
source "$(dirname "$0")/common.inc"

run recover "$velmari" --best 1000 --without 'h loss' --without 'final vowel' kok
is_code 0
grep -qE '^koɡ  +' "$t/.out" || fail "koɡ among the candidates"
grep -qE '^kok  +' "$t/.out" || fail "kok among the candidates"
run recover "$velmari" --best 3 taka
is_code 0; has_out 'infinitely many'; has_out "h loss"; has_out 'taka'
run recover "$velmari" --format tsv --best 2 taka
is_code 0; has_out $'surface\tform\trestorations\tweight\tgloss'; has_out $'taka\ttaka\t0\t0\t'
run recover "$velmari" --format json --best 2 taka
is_code 0; has_out '"infinite": true'; has_out '"gloss": null'
# No word of this language ends in a voiced obstruent.
run recover "$velmari" koɡ
is_code 1; is_out '∅'
feed 'taka\nkoɡ\n' recover "$velmari" --best 1
is_code 1; has_out '[taka]'; has_out '[koɡ]'
run recover "$velmari" ta8
is_code 2; has_err 'argument:1:3: error: '
run recover "$velmari" --best 0 taka
is_code 2
done_testing
