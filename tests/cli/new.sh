# new: the starter grammar checks and runs clean, as the comments in it say; a file that is there is not lost.
source "$(dirname "$0")/common.inc"
cd "$t"
run new olmet.tier
is_code 0; is_out ''; no_err
run check olmet.tier
is_code 0; no_err; has_out '9 of 9 rows derived, 0 failed'
run derive olmet.tier aN-pika aN-ɡulu aN-isu tad lamb lamb-u kisl
is_code 0; no_err; is_out 'ampika\naŋɡulu\nanisu\ntat\nlamip\nlambu\nkisil'
run derive olmet.tier --trace aN-pika
is_code 0; has_out "p's Place spread to N"
run recover olmet.tier tat
is_code 0; [[ "$out" =~ tad\ +0 ]] || fail 'tad expected'
# Each rule is needed: without it some row fails, or has no symbol for N.
while IFS= read -r rule; do
  run check olmet.tier --without "$rule"
  [[ "$code" -ne 0 && ( "$out" == *' 2 failed' || "$err" == *'no symbol spells N'* ) ]] || fail "without $rule: a failure expected"
done < <(sed -nE 's/^rule "([^"]*)".*/\1/p' olmet.tier)
# Every section has a comment over it.
for section in tree segments omit class rule lexicon paradigm data; do
  grep -B1 -E "^$section " olmet.tier | head -1 | grep -q '^--' || fail "a comment expected over $section"
done

run new
is_code 0; [[ "$out" == "$(<olmet.tier)" ]] || fail "the same on standard output expected"
printf 'mine\n' >kept.tier
run new kept.tier
is_code 3; has_err "'kept.tier' is there already"; has_err '--overwrite'
[[ "$(<kept.tier)" == mine ]] || fail "the file should stay"
run new -o kept.tier --overwrite
is_code 0; cmp -s kept.tier olmet.tier || fail "the file should be another"
run new no/such/folder/x.tier
is_code 3; has_err 'cannot write'
run new --help
is_code 0; has_out 'Example'
done_testing
