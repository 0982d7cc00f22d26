# --spelled: forms read and written by the spelling; forms with tags. The words are Velmari, made up, and so is the spelling.
source "$(dirname "$0")/common.inc"

{ cat "$velmari"; cat <<'END'
lexicon { stem /keni/ 'stone' noun   stem /talu/ 'rope' noun   suffix /-lA/ PL }
paradigm noun { stem noun; number : SG //  PL /-lA/ }
spelling { ng = ŋ; c = k; ä = æ; n = ŋ before /k/ }
data { ⟨uncog⟩ [uncoc] 'without a bird' }
END
} >"$t/v.tier"

run derive "$t/v.tier" --spelled ceni-lA
is_code 0; is_out 'cenilä'; no_err
run derive "$t/v.tier" --spelled --pairs un-cog
is_out 'un-cog\tuncoc'
run derive "$t/v.tier" --spelled ceqi
is_code 2; has_err 'argument:1:3: error: '; has_err 'give it a line in `spelling`'
feed 'ceni\ntalu-lA\n' derive "$t/v.tier" --spelled
is_out 'ceni\ntalula'
run derive "$t/v.tier" --spelled --format json ceni
has_out '"surface": "ceni"'; has_out '"readings": [{"reading": "keni", "surface": "ceni"}]'
run derive "$t/v.tier" --spelled --trace ceni-lA
is_code 0; has_out 'surface          cenilä'
run recover "$t/v.tier" --from segments --spelled --best 200 uncoc
is_code 0; has_out 'un-coɡ'; has_err '⟨uncoc⟩ may be read unkok or uŋkok'
run check "$t/v.tier" --spelled
is_code 0; has_out '6 of 6 rows derived'
printf 'underlying\tsurface\nceni-lA\tcenilä\ncog\tcog\n' >"$t/rows.tsv"
run check "$t/v.tier" "$t/rows.tsv" --spelled
is_code 1; has_out 'expected  [coɡ]'; has_out 'derived   [coc]'
run paradigm "$t/v.tier" --spelled --stem ceni
is_out "ceni 'stone'\nSG  ceni     ceni\nPL  ceni-lA  cenilä"
run words "$t/v.tier" --spelled
has_out 'ceni-lA  cenilä  stone PL'
run derive "$velmari" --spelled talu
is_code 2; has_err 'the grammar has no `spelling`'

# `length doubled` holds for symbols too: machine and interpreter write alike.
{ cat "$velmari"; echo 'length doubled in C'; echo 'data comparing length { /tallu/ [tallu]  /sonːa/ [sonna]  /keniː/ [keniː] }'; } >"$t/d.tier"
run derive "$t/d.tier" talːu keːni
is_code 0; is_out 'tallu\nkeːni'
run derive "$t/d.tier" --trace tallu
has_out 'surface          tallu'
run check "$t/d.tier"
is_code 0; has_out '8 of 8 rows derived'
run recover "$t/d.tier" --best 1 tallu
is_code 0; has_out 'tallu'

# Tags: read, and errors if nobody knows them.
run derive "$t/v.tier" keni@noun-lA√talu
is_code 2; has_err '√ stands inside a morpheme'
run derive "$t/v.tier" --pairs keni@noun-lA
is_code 0; is_out 'keni@noun-lA\tkenilæ'
run derive "$t/v.tier" un-√koɡ
is_out 'uŋkok'
run derive "$t/v.tier" keni@nuon
is_code 2; has_err '[unknown-tag]'; has_err "did you mean 'noun'?"
done_testing
