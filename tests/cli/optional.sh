# Optional rules in every verb. A consonant between vowels is voiced with .25; what is voiced there then is devoiced with .5. So p
# there stays with .75 + .25 x .5 = .875 and comes out b with .125; b stays with .5. Two of them: the products.
source "$(dirname "$0")/common.inc"

cat >"$t/o.tier" <<'END'
tree {
  root > ±cons ±son ±syll ±nasal ±cont
  root > Laryngeal > ±voice sg
  root > Place > •Labial •Coronal •Dorsal
  Dorsal > ±high ±low
}
segments from "ipa" { p t b d a i }
rule "voicing"   { where [+syll] X:[-son] [+syll]   set X [+voice]   optional 0.25 }
rule "devoicing" { where [+syll] X:[-son] [+syll]   set X [-voice]   optional 0.5 }
spelling { v = b }
lexicon {
  stem /apa/ 'rope' noun
  stem /pata/ 'hill'
}
paradigm noun { stem noun; number : SG // PL /-pa/ }
END

run derive "$t/o.tier" apa apada pa
is_code 0; no_err; is_out 'apa 0.875\taba 0.125\napata 0.438\tapada 0.438\tabata 0.0625\tabada 0.0625\npa'
run derive "$t/o.tier" --pairs apa pa
is_out 'apa\tapa 0.875\taba 0.125\npa\tpa'
run derive "$t/o.tier" --format tsv apa pa
is_out 'underlying\tsurface\tprobability\treading\napa\tapa\t0.875\t\napa\taba\t0.125\t\npa\tpa\t1\t'
run derive "$t/o.tier" --format json pa apa
has_out '{"underlying": "pa", "surface": "pa", "outputs": [{"surface":"pa","probability":1.0}]}'
has_out '{"underlying": "apa", "surface": "apa", "outputs": [{"surface":"apa","probability":0.875},{"surface":"aba","probability":0.125}]}'
run derive "$t/o.tier" --best 1 apa
is_code 0; no_err; is_out 'apa 0.875'
run derive "$t/o.tier" --best 1 --format json apa
has_out '"more": true'
run derive "$t/o.tier" apapapapapa       # five consonants: 32 outputs
is_code 0; has_err '/apapapapapa/ has more outputs; the 20 likeliest are shown (--best N)'
[[ "$(tr '\t' '\n' <<<"$out" | wc -l)" -eq 20 ]] || fail '20 outputs expected'
run derive "$t/o.tier" --best 32 apapapapapa
no_err; [[ "$(tr '\t' '\n' <<<"$out" | wc -l)" -eq 32 ]] || fail '32 outputs expected'
run derive "$t/o.tier" --best 0 apa
is_code 2; has_err '--best 0: give a number from 1 to 4096'
feed 'apa\nax\npa\n' derive "$t/o.tier" --keep-going --format tsv
is_code 1; has_out $'ax\t∅\t\t'; has_out $'pa\tpa\t1\t'
feed 'ax\n' derive "$t/o.tier" --keep-going --format json
has_out '"surface": null, "outputs": []'
run derive "$t/o.tier" --spelled ava
has_out 'ava 0.5'; has_out 'apa 0.5'
run derive "$t/o.tier" --without voicing --without devoicing apa
is_out 'apa'

run derive "$t/o.tier" --trace apa
is_code 0; has_out 'probability 0.875; the steps are those of the likeliest way'; has_out 'other outputs: aba 0.125'
run derive "$t/o.tier" --trace --best 1 apata
has_out 'probability 0.766'; has_out ' 0.109 and 2 more'       # .875 x .875, .875 x .125
run derive "$t/o.tier" --trace pa
[[ "$out" != *probability* ]] || fail 'one output is no choice'
run derive "$t/o.tier" --trace --format json apa
has_out '"outputs"'; has_out '"probability": 0.875'

run words "$t/o.tier"
is_code 0; has_out 'apa-pa  apapa 0.766 ~ '; has_out 'pata    pata 0.875 ~ pada 0.125'
run paradigm "$t/o.tier" noun --stem apa
has_out 'SG  apa     apa 0.875 ~ aba 0.125'

# The weight is -ln of the probability: -ln .125 = 2.079, -ln .5 = .6931, -ln .875 = .1335.
run recover "$t/o.tier" --from segments --best 2 aba
is_code 0; has_out 'aba  0  0.6931'; has_out 'apa  0   2.079'; has_out 'there are more'
run recover "$t/o.tier" aba
is_code 0; no_err; is_out 'apa  0  2.079  rope SG'
run recover "$t/o.tier" --format tsv apa
has_out $'apa\tapa\t0\t0.1335\trope SG'
run recover "$t/o.tier" --spelled ava
is_out 'apa  0  2.079  rope SG'

printf 'underlying\tsurface\napa\tapa\napa\taba\napada\tabata\n' >"$t/fine.tsv"
run check "$t/o.tier" "$t/fine.tsv"
is_code 0; has_out '3 of 3 rows derived'; has_out 'less likely output (0.125): /apa/ [aba], likeliest [apa]'
done_testing
