# compile: statistics; the machine file comes later.
source "$(dirname "$0")/common.inc"

run compile "$velmari" --stats
is_code 0; has_out 'segment  rules  states'
run compile "$velmari" --stats --format json
is_code 0; has_out '"states": '
run compile "$velmari" -o "$t/x.machine"
is_code 2; has_err 'comes with a later release'
[[ ! -e "$t/x.machine" ]] || fail "no file expected"
run compile --help
is_code 0; has_out '--stats'; has_out 'comes with a later release'
[[ "$out" != *--output* ]] || fail "an option that is refused should not be offered"
run compile "$velmari"
is_code 0; has_out '6 rules'
done_testing
