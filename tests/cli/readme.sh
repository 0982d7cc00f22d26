# Runs the console blocks of README.md and compares, and its table of sizes: a line "$ command", then what it prints. In an expected line the
# sign … stands for anything (times).
source "$(dirname "$0")/common.inc"
mkdir "$t/bin"
ln -s "$TIERSMITH" "$t/bin/tiersmith"
export PATH="$t/bin:$PATH"
unset -f tiersmith
cd "$TIERSMITH_SOURCE"
examples=0

# matches TEXT PATTERN: equal, … in the pattern standing for anything.
matches() {
  local rest="$1" pattern="$2" piece first=1
  while [[ "$pattern" == *…* ]]; do
    piece="${pattern%%…*}"
    pattern="${pattern#*…}"
    if [[ "$first" -eq 1 ]]; then
      [[ "$rest" == "$piece"* ]] || return 1
    else
      [[ "$rest" == *"$piece"* ]] || return 1
    fi
    rest="${rest#*"$piece"}"
    first=0
  done
  if [[ "$first" -eq 1 ]]; then [[ "$rest" == "$pattern" ]]; else [[ "$rest" == *"$pattern" ]]; fi
}

compare() {
  [[ -n "$command" ]] || return 0
  examples=$((examples + 1))
  out="$(bash -c "$command" 2>&1 </dev/null)"
  matches "$out" "${expected%$'\n'}" && return 0
  code=0 err="expected:
$expected"
  fail "README: $command"
}

inside=0 command="" expected=""
while IFS= read -r line; do
  if [[ "$line" == '```console' ]]; then
    inside=1 command="" expected=""
  elif [[ "$line" == '```' && "$inside" -eq 1 ]]; then
    compare
    inside=0
  elif [[ "$inside" -eq 1 && "$line" == '$ '* ]]; then
    compare
    command="${line#\$ }" expected=""
  elif [[ "$inside" -eq 1 ]]; then
    expected+="$line"$'\n'
  fi
done <README.md
# The table of sizes: a row for each ruleset with data, as `compile` counts them.
rows=0
for grammar in rulesets/*/*.tier; do
  name="$(basename "$grammar" .tier)"
  run compile "$grammar" --format tsv
  read -r rules states arcs <<<"$(awk -F'\t' 'NR > 1 { r += $2; s += $3; a += $4 } END { print r, s, a }' <<<"$out")"
  row="| \`$name\` | $rules | $states | $arcs |"
  grep -qxF "$row" README.md || fail "in the README's table of sizes expected: $row"
  rows=$((rows + 1))
done
[[ "$rows" -ge 5 ]] || fail "rulesets expected"
[[ "$examples" -ge 5 ]] || { code=0; out="$examples"; err=""; fail "examples expected in README.md"; }
done_testing
