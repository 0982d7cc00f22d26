# The worked day of demo/ says what its text says: ten rows fail, five are of the word that gets its tag, and the five planted mistakes
# are left. The survey's surfaces come from outside this program, so the count says that rules, lexicon and survey are of one mind.
source "$(dirname "$0")/common.inc"
code=0; err=""
out="$(sed -e 's/^install_missing_packages$//' -e 's/^build_targets .*$/build="$(dirname "$TIERSMITH")"/' \
  -e "s|^source .*prepare.sh\"|root='$TIERSMITH_SOURCE'|" "$TIERSMITH_SOURCE/demo/run" | bash 2>"$t/.err")" || code=$?
err="$(<"$t/.err")"
is_code 0; no_err
[[ "$(grep -c $'\tback harmony\t' <<<"$out")" -eq 5 ]] || fail 'five rows of the exception expected'
has_out "first went wrong at rule 'nasal place'"
left="$(grep "^survey.tsv:.*'" <<<"${out##*except word fronting}" | grep -o '/.*/' | paste -s -d ' ')"
[[ "$left" == '/sud/ /toːli-tI/ /koɡ-In/ /sutk/ /un-koɡ-lA/' ]] || fail "the five planted mistakes expected, not: $left"
has_out $'\n219 of 224 rows derived, 5 failed\n'
has_out $'\nsaːm-lA\tsanla\n'; has_out $'\ntalu-hAn\ttaluan 0.75\ttalua 0.25\n'
has_out $'\nh between vowels    pa-In\n'; has_out $'\nsurface             paɯn\n'
has_out $'[sut]\nsud  0  0  evening SG NOM\nsut  0  0  knife SG NOM\n'; has_out 'rope PL GEN'; has_out 'PST  hundam'
has_out 'until speakers confirm it'
[[ "$(wc -l <<<"$out")" -le 150 ]] || fail 'short enough to be read at once'
[[ "$(wc -l <"$TIERSMITH_SOURCE/demo/lexicon.tsv")" -gt 120 ]] || fail 'the words of a field team'

# All words of the lexicon and its paradigms have a result.
run words "$TIERSMITH_SOURCE/demo/velmari.tier" --limit 0 --format tsv
is_code 0; no_err; [[ "$(wc -l <<<"$out")" -gt 1500 ]] || fail 'more than 1500 words expected'
[[ "$out" != *∅* ]] || fail 'each word has a surface form'
done_testing
