# Verbs and formats of later releases say so and exit with 2.
source "$(dirname "$0")/common.inc"
for verb in audit order compare weigh report draw emit; do
  run "$verb" "$velmari" --some option
  is_code 2; has_err "'$verb' is not supported yet"
done
run check "$velmari" --format latex
is_code 2; has_err 'not supported yet'
done_testing
