# recover --from lexicon. The words are Velmari, made up; what they come out as follows from the rules of demo/sketch.tier: n takes the
# place of a consonant, ɡ is devoiced at the end of a word, A is a after back vowels and æ elsewhere.
source "$(dirname "$0")/common.inc"

{ cat "$velmari"; cat <<'END'
lexicon {
  stem /talu/ 'rope' noun   stem /keni/ 'stone' noun   stem /kok/ 'hen' noun   stem /koɡ/ 'go' verb in PST /henu/
  stem /un/ 'yes'   prefix /un-/ 'without'   clitic /=ra/ 'and'   suffix /-lA/
}
paradigm noun {
  stem noun
  number : SG //  PL /-lA/
  case   : NOM //  LOC /-tA/ after [-syll], /-sA/ after [+syll]
  PL LOC : /-nAl/
}
paradigm verb { stem verb; tense : PRS //  PST /-lA/ }
END
} >"$t/v.tier"

run recover "$t/v.tier" kok
is_code 0; no_err; is_out 'kok  0  0  hen SG NOM\nkoɡ  0  0  go PRS'
run recover "$t/v.tier" talula
is_out 'talu-lA  1  0  rope PL NOM'
run recover "$t/v.tier" talusa kokta kenisæ
has_out 'talu-sA  1  0  rope SG LOC'; has_out 'kok-tA  1  0  hen SG LOC'; has_out 'keni-sA  1  0  stone SG LOC'
run recover "$t/v.tier" henula
is_out 'henu-lA  1  0  go PST'
run recover "$t/v.tier" uŋkok
is_out 'un-kok  1  0  without hen SG NOM\nun-koɡ  1  0  without go PRS'
run recover "$t/v.tier" 'talura un'
is_out 'talu=ra#un  2  0  rope SG NOM and # yes'
run recover "$t/v.tier" unla                          # -lA stands in paradigms, and none takes un
is_code 1; is_out '∅'; has_err 'no word of the lexicon comes out as [unla]; --from segments looks beyond it'
run recover "$t/v.tier" --from segments --best 4 --without "h loss" unla
is_code 0; has_out unla
run recover "$t/v.tier" --format tsv kok
is_out 'surface\tform\trestorations\tweight\tgloss\nkok\tkok\t0\t0\then SG NOM\nkok\tkoɡ\t0\t0\tgo PRS'
run recover "$t/v.tier" --format json kok
has_out '"gloss": "hen SG NOM"'
feed 'kok\nunla\nkex\n' recover "$t/v.tier" --keep-going
is_code 1; has_out '[unla]'; has_err 'as [unla]'; [[ "$err" != *'as [kex]'* ]] || fail 'a form that cannot be read is not looked up'
run recover "$t/v.tier" --from words kok
is_code 2; has_err '--from words: candidates come from lexicon or segments'
run recover "$velmari" --from lexicon kok
is_code 2; has_err 'the lexicon has no stems'; has_err '--from segments'
run compile "$t/v.tier" -o "$t/v.machine"
run recover "$t/v.machine" talula
is_out 'talu-lA  1  0  rope PL NOM'

# A cell without a form is said, and is no word.
sed '/^paradigm verb/a paradigm odd { stem odd; case : NOM // ERG /-tA/ after /u/ }' "$t/v.tier" |
  sed "s/stem .un. 'yes'/stem \/un\/ 'yes' odd/" >"$t/odd.tier"
run recover "$t/odd.tier" un
has_out "yes NOM"; has_err "no form of 'ERG' fits after n"

# Tags that a rule asks for are those of the entries; typed from segments they would be restored.
{ sed 's/where X:\[-son voice\] #   delink X.voice/& except X in loan/' "$velmari"; cat <<'END'
lexicon { stem /koɡ/ 'go'   stem /koɡ/ 'cake' loan }
END
} >"$t/tags.tier"
run recover "$t/tags.tier" kok koɡ
is_code 0; has_out 'koɡ  0  0  go'; has_out 'koɡ@loan  0  0  cake'
done_testing
