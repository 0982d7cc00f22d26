# compile: statistics. The machine file: machine.sh.
source "$(dirname "$0")/common.inc"

run compile "$velmari" --stats
is_code 0; has_out 'segment  rules  states'
run compile "$velmari" --stats --format json
is_code 0; has_out '"states": '
run compile "$velmari" -o "$t/x.machine" --stats
is_code 0; has_out 'segment  rules  states'
[[ -s "$t/x.machine" ]] || fail "the machine file expected"
run compile --help
is_code 0; has_out '--stats'; has_out 'write the machine file'
run compile "$velmari"
is_code 0; has_out '6 rules'
done_testing
