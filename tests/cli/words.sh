# words and paradigm: tables in their shapes, formats, stems by name, samples, what is missing. The words are Velmari, made up.
source "$(dirname "$0")/common.inc"

{ cat "$velmari"; cat <<'END'
lexicon {
  stem /talu/ 'rope' noun   stem /keni/ 'stone' noun weight 3   stem /koɡ/ 'go' verb in PST /henu/
  stem /un/ 'yes'
}
paradigm noun {
  stem noun
  number : SG //  PL /-lA/
  case   : NOM //  LOC /-tA/ after [-syll], /-sA/ after [+syll]
  PL LOC : /-nAl/
}
paradigm verb { stem verb; tense : PRS //  PST /-lA/ }
paradigm odd  { stem odd; case : ERG /-tA/ after /u/ }
END
} >"$t/v.tier"
grep -v '^paradigm odd' "$t/v.tier" >"$t/w.tier"

run paradigm "$t/w.tier" noun --stem talu
is_code 0; no_err; is_out "talu 'rope'\n    NOM     LOC\nSG  talu    talusa\nPL  talula  talunal"
run paradigm "$t/v.tier" verb
is_out "koɡ 'go'\nPRS  koɡ      kok\nPST  henu-lA  henula"
run paradigm "$t/v.tier" noun
is_code 0; has_out 'talu  rope   SG NOM  talu      talu'; has_out 'keni  stone  PL LOC  keni-nAl  keninæl'
run paradigm "$t/v.tier" noun --stem keni --format tsv
has_out 'paradigm	stem	gloss	cell	underlying	surface	probability'
has_out 'noun	keni	stone	SG LOC	keni-sA	kenisæ	1'
run paradigm "$t/v.tier" noun --stem keni --format md
has_out '**keni '; has_out '| SG | keni | kenisæ |'; has_out '|---|---|---|'
run paradigm "$t/v.tier" noun --stem keni --format json
has_out '"morphemes": "keni@stem@noun-lA@suffix@PL"'; has_out '"surface": "kenilæ"'
run paradigm "$t/v.tier" noun --stem nula           # a stem that is not listed
is_code 0; has_out 'SG  nula    nulasa'
run paradigm "$t/v.tier" odd --stem nuli@odd
is_code 1; has_out 'ERG  ∅'; has_err "no form of 'ERG' fits after i: cell 'ERG' of nuli"; has_err 'help:'
run paradigm "$t/v.tier" nuon
is_code 2; has_err "no paradigm 'nuon'"; has_err "did you mean 'noun'?"
run paradigm "$t/v.tier" odd
is_code 2; has_err 'no stem for this paradigm'; has_err '--stem'
run paradigm "$velmari"
is_code 2; has_err 'the grammar has no paradigm'
run paradigm "$t/v.tier" noun --stem ta-lu
is_code 2; has_err 'a stem is one morpheme'
run paradigm "$t/v.tier" --format latex
is_code 2; has_err 'the formats are text, tsv, json and md'

run words "$t/w.tier"
is_code 0; no_err; has_out 'talu-sA   talusa   rope SG LOC'; has_out 'henu-lA   henula   go PST'; has_out 'un        un       yes'
run words "$t/v.tier" --limit 2
is_code 0; is_out 'talu     talu    rope SG NOM\ntalu-sA  talusa  rope SG LOC'; has_err 'the first 2 are shown'
run words "$t/v.tier" --sample 4 --seed 5 --format tsv
is_code 0; first="$out"; [[ "$(wc -l <<<"$out")" -eq 5 ]] || fail 'four words and a heading expected'
run words "$t/v.tier" --sample 4 --seed 5 --format tsv
[[ "$out" == "$first" ]] || fail 'the same seed gives the same words'
run words "$t/v.tier" --format json --limit 1
has_out '"underlying": "talu"'; has_out '"gloss": "rope SG NOM"'
run words "$velmari"
is_code 2; has_err 'the lexicon has no stems'; has_err 'help:'
done_testing
