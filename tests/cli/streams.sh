# Many forms on standard input: order, count, bad lines by number, bounded memory; and --jobs, which changes nothing of it. The
# forms are of the invented languages of demo/ and of this script; what they come out as follows from the rules.
source "$(dirname "$0")/common.inc"

# stream FILE ARGS..: the command on the file; the output stays in $t/.out.
stream() {
  code=0 out=""
  tiersmith "${@:2}" <"$1" >"$t/.out" 2>"$t/.err" || code=$?
  err="$(<"$t/.err")"
}
same_out() { cmp -s "$1" "$t/.out" || fail "the output expected is that of $1"; }

lines=100000
awk -v n="$lines" 'BEGIN { for (i = 1; i <= n; i++) {
  print (i % 25000 == 0 ? "ta8lu" : i % 2 ? "talu-lA" : "un-koɡ") > "'"$t"'/in.txt"
  print (i % 25000 == 0 ? "∅" : i % 2 ? "talula" : "uŋkok") > "'"$t"'/expected.txt" } }'
for jobs in 1 3; do
  stream "$t/in.txt" derive "$velmari" --keep-going --jobs "$jobs"
  is_code 1
  same_out "$t/expected.txt"
  [[ "$(grep -o '<stdin>:[0-9]*' "$t/.err" | tr '\n' ' ')" == '<stdin>:25000 <stdin>:50000 <stdin>:75000 <stdin>:100000 ' ]] ||
    fail "the bad lines by number, in order"
  stream "$t/in.txt" derive "$velmari" --jobs "$jobs"
  is_code 2; has_err '<stdin>:25000:3: error: '; has_err '--keep-going'
  head -n 24999 "$t/expected.txt" | cmp -s - "$t/.out" || fail "all lines before the bad one and none behind"
done
[[ "$err" != *$'\r'* ]] || fail "no progress where it is no terminal"

# The same bytes for any number of workers, in every format.
head -n 3000 "$t/in.txt" | sed 's/ta8lu/talu/' >"$t/few.txt"
printf 'ta8lu\nkoɡ\n' >>"$t/few.txt"
for format in text tsv json; do
  for more in --pairs --trace; do
    [[ "$format$more" != tsv--trace ]] || continue
    head -n "$([[ "$more" == --trace ]] && echo 300 || echo 3002)" "$t/few.txt" >"$t/some.txt"
    stream "$t/some.txt" derive "$velmari" --keep-going --format "$format" "$more"
    cp "$t/.out" "$t/one.txt"
    cp "$t/.err" "$t/one.err"
    stream "$t/some.txt" derive "$velmari" --keep-going --format "$format" "$more" --jobs 4
    same_out "$t/one.txt"
    cmp -s "$t/one.err" "$t/.err" || fail "the messages of one job"
  done
  printf 'taka\nkok\nta8\nkoɡ\n%.0s' {1..10} >"$t/surface.txt"
  stream "$t/surface.txt" recover "$velmari" --best 3 --keep-going --format "$format"
  is_code 1
  cp "$t/.out" "$t/one.txt"
  cp "$t/.err" "$t/one.err"
  stream "$t/surface.txt" recover "$velmari" --best 3 --keep-going --format "$format" --jobs 3
  is_code 1
  same_out "$t/one.txt"
  cmp -s "$t/one.err" "$t/.err" || fail "the messages of one job"
done
: >"$t/nothing.txt"
stream "$t/nothing.txt" derive "$velmari" --jobs 2 --format json
is_code 0; no_err
[[ "$(<"$t/.out")" == '[]' ]] || fail "an empty list"
run derive "$velmari" --jobs 2 talu-lA koɡ
is_code 0; is_out 'talula\nkok'; no_err
for jobs in 0 257 -1 x; do
  run derive "$velmari" --jobs "$jobs" talu
  is_code 2; has_err 'jobs'
done

# Whoever types a line gets its answer before the next one is asked for.
for jobs in 1 2; do
  coproc answers { tiersmith derive "$velmari" --jobs "$jobs"; }
  for form in talu-lA un-koɡ; do
    echo "$form" >&"${answers[1]}"
    read -r -t 20 answer <&"${answers[0]}" || answer="none"
    [[ "$answer" == "$([[ "$form" == talu-lA ]] && echo talula || echo uŋkok)" ]] || fail "an answer to $form, not $answer"
  done
  eval "exec ${answers[1]}>&-"
  wait "$answers_PID"
done

# Progress: on a terminal, once it takes long, and nothing of it stays.
for terminal in xterm dumb; do
  TERM="$terminal" script -qec "{ echo talu; sleep 2.5; echo koɡ; } | '$TIERSMITH' derive '$velmari' >'$t/.out'" \
    "$t/seen.txt" >"$t/.err" </dev/null
  code=$? out="" err="$(<"$t/.err")"
  is_code 0
  [[ "$(<"$t/.out")" == $'talu\nkok' ]] || fail "talu and kok"
  shown="$(grep -c $'\r2 forms, [0-9]* a second\033\[K\r\033\[K' "$t/seen.txt")"
  [[ "$shown" -eq "$([[ "$terminal" == xterm ]] && echo 1 || echo 0)" ]] || fail "progress on a terminal that is $terminal"
done

# Spelled and tagged, ten times as many forms take no more memory. By hand: ng is ŋ; -ka is -ɡa behind a stem tagged soft.
cat >"$t/s.tier" <<'TIER'
tree {
  root   > ±cons ±son ±syll ±nasal ±voice
  root   > Place > •Labial •Dorsal
  Labial > round
  Dorsal > ±high ±low ±back
}
segments from "ipa" { p k b ɡ m ŋ i u a  without ±back in [-syll] }
spelling { ng = ŋ; g = ɡ }
rule "soft" { where X:[-son] - T:/k/   only X in soft   set T [+voice] }
lexicon { stem /kup/ soft  stem /mip/ }
TIER
run compile "$t/s.tier" -o "$t/s.bin"
is_code 0; no_err
mkfifo "$t/forms"
"$TIERSMITH" derive "$t/s.bin" --spelled <"$t/forms" >"$t/.out" 2>"$t/.err" &
process=$!
exec 9>"$t/forms"
# more_forms FROM TO: feeds lines, waits for their answers, and says the most memory so far, in kB.
more_forms() {
  awk -v from="$1" -v to="$2" 'BEGIN { for (i = from; i < to; i++) print (i % 2 ? "kup-kang" : "mip-kang") }' >&9
  for _ in {1..600}; do
    [[ "$(wc -l <"$t/.out")" -lt "$2" ]] || break
    sleep 0.1
  done
  sed -n 's/^VmHWM:[^0-9]*\([0-9]*\) kB/\1/p' "/proc/$process/status"
}
small="$(more_forms 0 10000)"
large="$(more_forms 10000 100000)"
exec 9>&-
code=0
wait "$process" || code=$?
out="" err="$(<"$t/.err")"
is_code 0; no_err
[[ "$(sort "$t/.out" | uniq -c | tr -s ' \n' ' ')" == ' 50000 kupgang 50000 mipkang ' ]] || fail "kupgang and mipkang"
[[ -n "$small" && -n "$large" ]] && ((large < small + 2048)) || fail "memory: $small kB, then $large kB"
done_testing
