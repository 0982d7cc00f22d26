# The mistakes of a first evening: each ends with the right code, a place worked out here from the damaged text, and a way out.
source "$(dirname "$0")/common.inc"
export LC_ALL=C.UTF-8  # columns count characters

# damage WORD OTHER: the demo grammar with the first WORD replaced; $place is where OTHER now stands, as line:column.
damage() {
  local text before
  text="$(<"$velmari")"
  [[ "$text" == *"$1"* ]] || fail "the demo should have: $1"
  before="${text%%"$1"*}"
  printf '%s\n' "$before$2${text#*"$1"}" >"$t/g.tier"
  local line_start="${before##*$'\n'}" lines="${before//[^$'\n']/}"
  place="$((${#lines} + 1)):$((${#line_start} + 1))"
}
# later N: $place moved N characters to the right, for a replacement that begins with what is right.
later() { place="${place%:*}:$((${place#*:} + $1))"; }
# complains NAME KIND REMEDY: one message, at $place of NAME, with a remedy that says so.
complains() {
  is_out ''
  has_err "$1:$place: error: "
  has_err "[$2]"
  has_err '  help: '
  has_err "$3"
  [[ "$(grep -c 'error: ' "$t/.err")" -eq 1 ]] || fail 'one message expected'
}

# Names with a letter wrong.
damage '[+cons Place]' '[+kons Place]'; later 2
run derive "$t/g.tier" talu
is_code 2; complains g.tier unknown-feature "did you mean 'cons'?"
damage 'N.Place ' 'N.Plaec '; later 2
run derive "$t/g.tier" talu
is_code 2; complains g.tier unknown-node "did you mean 'Place'?"
damage 'to N }' 'to M }'; later 3
run check "$t/g.tier"
is_code 2; complains g.tier unknown-label 'label one: M:[..]'
damage '/h/' '/ħ/'; later 1
run derive "$t/g.tier" talu
is_code 2; complains g.tier unknown-symbol 'list it in `segments`'
damage '[+syll back]' '[+syll bakc]'; later 7
run compile "$t/g.tier"
is_code 2; complains g.tier unknown-feature "did you mean 'back'?"
damage 'class V' 'clas V'
run derive "$t/g.tier" talu
is_code 2; has_err "g.tier:$place: error: "; has_err '[syntax]'; has_err '  help: '

# A word of the notation as a name.
damage 'class V' 'class stem'; later 6
run derive "$t/g.tier" talu
is_code 2; has_err "g.tier:$place: error: 'stem' is a word of the notation"; has_err 'help: put it in double quotes: "stem"'

# Files: empty, cut off, missing, not UTF-8, a folder.
: >"$t/empty.tier"
place=1:1
for verb in derive recover check compile; do
  run "$verb" "$t/empty.tier"
  is_code 2; complains empty.tier bad-tree 'it needs at least a `tree`'
done
damage '{ where H' '{ where H'
text="$(<"$velmari")"
printf '%s' "${text%%delete H*}delete" >"$t/g.tier"
run derive "$t/g.tier" talu
is_code 2; complains g.tier unclosed-block "add '}' where it ends"
run derive "$t/absent.tier" talu
is_code 3; is_out ''; has_err "cannot read '$t/absent.tier': there is no such file"; has_err '  help: check the path'
run check "$velmari" "$t/absent.tsv"
is_code 3; is_out ''; has_err "cannot read '$t/absent.tsv'"; has_err '  help: '
run derive "$t" talu
is_code 3; is_out ''; has_err 'it is a folder'; has_err '  help: '
damage 'Velmari"' 'Velmæri"'; later 4
sed $'s/Velm\u00E6ri/Velm\\xE6ri/' "$t/g.tier" >"$t/latin1.tier"
run derive "$t/latin1.tier" talu
is_code 2; complains latin1.tier not-utf8 'iconv -f LATIN1 -t UTF-8'
iconv -f UTF-8 -t UTF-16 "$velmari" >"$t/utf16.tier"
place=1:1
run derive "$t/utf16.tier" talu
is_code 2; complains utf16.tier not-utf8 'iconv -f UTF-16 -t UTF-8'

# A rule that can never apply: a warning, and the words come out all the same.
damage 'data {' 'rule "never" { where X:[+nasal -son]   delete X } data {'
run derive "$t/g.tier" talu-lA
is_code 0; is_out 'talula'
has_err "g.tier:$place: warning: rule \"never\" never changes anything"; has_err '  help: '

# Forms: a character of no symbol, as an argument and on standard input; a sign that is surface only.
place=1:3
run derive "$velmari" taʒu
is_code 2; complains argument unknown-character "did you mean 's'?"
feed 'talu\ntaʒu\n' derive "$velmari"
is_code 2; is_out 'talu'; has_err '<stdin>:2:3: error: '; has_err 'U+0292'; has_err '  help: '
run derive "$velmari" taŋu
is_code 2; complains argument bad-form 'write the segment it is made from'
run recover "$velmari" taAu
is_code 2; complains argument bad-form 'write the segment it comes out as'

# A survey with commas for tabs, and one with a cell too few.
printf 'underlying,surface\ntalu,talu\n' >"$t/comma.tsv"
place=1:1
run check "$velmari" "$t/comma.tsv"
is_code 2; complains comma.tsv bad-data 'parted by tabs'
printf 'underlying\tsurface\ntalu\n' >"$t/short.tsv"
place=2:1
run check "$velmari" "$t/short.tsv"
is_code 2; complains short.tsv bad-data 'as many cells as the heading'
done_testing
