# Help, version, usage errors, files that are missing or cannot be written.
source "$(dirname "$0")/common.inc"

run --version
is_code 0; has_out 'tiersmith 0.'
run --help
is_code 0; has_out 'derive'; has_out 'Exit codes'
for verb in derive recover check compile; do
  run "$verb" --help
  is_code 0; has_out 'Example'; has_out '--without'
done
run
is_code 2; has_err 'the verbs are'
run deriv x.tier
is_code 2; has_err "no verb 'deriv'"
run derive
is_code 2; has_err 'GRAMMAR'
run derive "$velmari" --no-such-option
is_code 2
run derive "$t/absent.tier" x
is_code 3; has_err 'absent.tier'
run derive "$velmari" --format yaml x
is_code 2; has_err 'text, tsv and json'
printf 'tree { root > ±cons\n' >"$t/bad.tier"
run derive "$t/bad.tier" x
is_code 2; has_err 'bad.tier:1:'; has_err 'help: '
run derive "$t/bad.tier" --format json x
is_code 2; has_err '"line": 1'

# The grammar from standard input.
code=0
out="$(tiersmith derive - un-koɡ <"$velmari" 2>"$t/.err")" || code=$?
err="$(<"$t/.err")"
is_code 0; is_out 'uŋkok'
feed '' derive -
is_code 2; has_err 'standard input'

# -o: written beside its place and renamed; a failed run leaves the old file alone.
printf 'old\n' >"$t/result.txt"
run derive "$velmari" -o "$t/result.txt" talu ta8
is_code 2; [[ "$(<"$t/result.txt")" == old ]] || fail "the old file should stay"
run derive "$velmari" -o "$t/result.txt" talu-lA
is_code 0; [[ "$(<"$t/result.txt")" == talula ]] || fail "the new file should be there"
[[ "$(ls "$t" | grep -c part)" -eq 0 ]] || fail "no partial file should be left"
run derive "$velmari" -o "$t/no/such/folder/x" talu
is_code 3; has_err 'cannot write'
if [[ -w /dev/full ]]; then
  code=0; out=""
  tiersmith derive "$velmari" talu >/dev/full 2>"$t/.err" || code=$?
  err="$(<"$t/.err")"
  is_code 3; has_err 'writing standard output failed'
fi
done_testing
