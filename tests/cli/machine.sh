# Machine files: all rulesets and the demo's sketch answer the same from one as from the grammar, in every verb; damaged files.
source "$(dirname "$0")/common.inc"
cp -r "$TIERSMITH_SOURCE/rulesets" "$TIERSMITH_SOURCE/demo" "$t"
mkdir "$t/alone"

# same WHAT VERB ARGS..: the verb, its output, messages and exit code are the same with g.machine as with $grammar. What is
# measured in seconds is not compared.
same() {
  local what="$1" verb="$2" wanted
  run "$verb" "$grammar" "${@:3}"
  wanted="$code|$(sed -E 's/[0-9]+\.[0-9]{3}$|"seconds": .*//' "$t/.out")|$err"
  run "$verb" g.machine "${@:3}"
  [[ "$code|$(sed -E 's/[0-9]+\.[0-9]{3}$|"seconds": .*//' "$t/.out")|$err" == "$wanted" ]] ||
    fail "$grammar, $what: expected as from the grammar: $wanted"
}

compared=0
for path in "$t"/rulesets/*/*.tier "$t"/demo/sketch.tier; do
  cd "$(dirname "$path")"
  grammar="$(basename "$path")"
  run compile "$grammar" -o g.machine
  is_code 0; is_out ''
  if [[ "$grammar" == turkish.tier ]]; then  # seconds to compile: only what its lexicon and spelling add
    same 'spelled words' derive --spelled --pairs kitap-lAr-ImIz-DA saat-YI söyle-Iyor
    same 'a paradigm' paradigm verb --stem git --spelled
    continue
  fi
  same sizes compile --stats
  same 'sizes as TSV' compile --format tsv
  same check check
  same 'check as JSON' check --format json
  [[ -e sketch.tsv ]] && same 'a survey' check sketch.tsv
  # Up to five forms of the data, both ways, and a few rules left out.
  run check "$grammar" --format tsv
  mapfile -t underlying < <(tail -n +2 <<<"$out" | cut -f1 | head -5)
  mapfile -t surface < <(tail -n +2 <<<"$out" | cut -f2 | head -5)
  [[ "${#underlying[@]}" -gt 0 && -n "${underlying[0]}" ]] || { underlying=(un-koɡ mohl talu-lA) surface=(uŋkok mol talula); }
  same derivations derive --pairs "${underlying[@]}"
  same traces derive --trace "${underlying[@]}"
  same recovery recover --best 5 "${surface[@]}"
  same 'recovery as JSON' recover --best 5 --format json "${surface[@]}"
  same 'an unknown character' derive 8
  while IFS= read -r rule; do
    same "without $rule" derive --without "$rule" --pairs "${underlying[@]}"
    compared=$((compared + 1))
  done < <(sed -nE 's/^ *rule "([^"]*)".*/\1/p' "$grammar" | head -4)
  # The same bytes again: from the grammar by another path, and from the machine file.
  run compile "$path" -o h.machine
  cmp -s g.machine h.machine || fail "$grammar: the same bytes expected from another path"
  run compile g.machine -o h.machine
  cmp -s g.machine h.machine || fail "$grammar: the same bytes expected from the machine file"
done
[[ "$compared" -ge 12 ]] || fail "rules expected"

# Away from everything it was made from; known by its first bytes, not its name; from standard input.
cp "$t/demo/g.machine" "$t/alone/x.tier"
cd "$t/alone"
rm -r "$t/demo"
out="$(TIERSMITH_RULESETS=/nowhere "$TIERSMITH" derive x.tier un-koɡ 2>"$t/.err")"
err="$(<"$t/.err")"
is_out 'uŋkok'; no_err
code=0
out="$(tiersmith derive - un-koɡ <x.tier 2>"$t/.err")" || code=$?
is_code 0; is_out 'uŋkok'

# Files that are included, and tables beside them, are in it too; messages name them as they lay beside the grammar.
mkdir -p "$t/parts/common"
sed '/^rule "nasal place"/d; /^data {/,$d' "$velmari" >"$t/parts/common/base.tier"
printf 'data from "rows.tsv"\n' >>"$t/parts/common/base.tier"
printf 'underlying\tsurface\nun-koɡ\tuŋkok\n' >"$t/parts/common/rows.tsv"
printf 'include "common/base.tier"\n%s\n' "$(grep '^rule "nasal place"' "$velmari")" >"$t/parts/g.tier"
run compile "$t/parts/g.tier" -o parts.machine
is_code 0
rm -r "$t/parts"
run check parts.machine
is_code 0; has_out '1 of 1 rows derived, 0 failed'
run check parts.machine --without 'nasal place'
is_code 1; has_out 'common/rows.tsv:2: /un-koɡ/'

# Rules left out when it was made stay out.
run compile "$velmari" --without 'h loss' -o h.machine
run derive h.machine mohl
is_code 0; is_out 'mohɯl'
run derive h.machine --without 'h loss' mohl
is_code 2; has_err "has no such rule"
run derive x.tier --without 'h los' mohl
is_code 2; has_err "did you mean 'h loss'?"

# Damage, and files of others.
size="$(stat -c %s x.tier)"
head -c $((size / 2)) x.tier >cut
run derive cut un-koɡ
is_code 3; has_err "cut off: $((size / 2)) of its $size bytes"; has_err 'help: '
{ head -c 2000 x.tier; printf 'X'; tail -c +2002 x.tier; } >altered
run check altered
is_code 3; has_err 'was altered after it was written'; has_err 'help: '
{ cat x.tier; printf 'X'; } >longer
run check longer
is_code 3; has_err 'goes on past its end'
run recover "$TIERSMITH" uŋkok
is_code 3; has_err 'neither a grammar nor a machine file'; has_err 'help: '
run derive altered --format json x
is_code 3; has_err '"kind": "altered-file"'

# Nothing stays at its place when writing fails; statistics and machine do not share an output.
run compile "$velmari" -o no/such/folder/x.machine
is_code 3; has_err 'cannot write'
run compile "$velmari" -o - --stats
is_code 2; has_err 'standard output'
done_testing
