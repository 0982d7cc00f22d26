# derive: arguments and lines, pairs, formats, bad lines. The forms are of the invented language of demo/.
source "$(dirname "$0")/common.inc"

run derive "$velmari" talu-lA keni-lA
is_code 0; is_out 'talula\nkenilæ'; no_err
feed 'talu-lA\r\nun-koɡ\n' derive "$velmari"
is_code 0; is_out 'talula\nuŋkok'
feed 'koɡ' derive "$velmari" -        # no line end after the last form
is_code 0; is_out 'kok'
feed '\xEF\xBB\xBFkoɡ\n' derive "$velmari"
is_code 0; is_out 'kok'
run derive "$velmari" --pairs talu-lA
is_out 'talu-lA\ttalula'
run derive "$velmari" --format tsv talu-lA
is_out 'underlying\tsurface\ntalu-lA\ttalula'
run derive "$velmari" --format json talu-lA koɡ
is_out '[\n{"underlying": "talu-lA", "surface": "talula"},\n{"underlying": "koɡ", "surface": "kok"}\n]'

# One line out for each line in, whatever is in it.
feed 'talu\nta8lu\nkoɡ\n' derive "$velmari" --keep-going --pairs
is_code 1; is_out 'talu\ttalu\nta8lu\t∅\nkoɡ\tkok'; has_err '<stdin>:2:3: error: '; has_err 'U+0038'
feed 'talu\nta8lu\nkoɡ\n' derive "$velmari" --keep-going --format json
is_code 1; has_out '{"underlying": "ta8lu", "surface": null}'
feed 'talu\nta8lu\nkoɡ\n' derive "$velmari"
is_code 2; is_out 'talu'; has_err '--keep-going'
run derive "$velmari" talu tal8
is_code 2; has_err 'argument:2:4: error: '

# Bytes that are not UTF-8 are a bad form, not the end.
feed 'ta\xFFlu\ntalu\n' derive "$velmari" --keep-going
is_code 1; is_out '∅\ntalu'
feed 'talu\nɡa\xF1u\n' derive "$velmari"
is_code 2; has_err '<stdin>:2:3: error: this form is not UTF-8: byte 0xF1 cannot stand here [not-utf8]'
has_err 'iconv -f LATIN1 -t UTF-8'
feed 'talu\nɡa\xF1u\n' derive "$velmari" --trace
is_code 2; has_err '<stdin>:2:3: error: this form is not UTF-8'
feed '\xFF\xFEt\x00a\x00\n' derive "$velmari"
is_code 2; has_err '<stdin>:1:1: error: this form is not UTF-8: byte 0xFF begins UTF-16 text'; has_err 'iconv -f UTF-16'
feed 'talu\nta\xC5' recover "$velmari"       # cut off within ŋ
is_code 2; has_err '<stdin>:2:3: error: this form is not UTF-8: byte 0xC5'; has_err 'help: give forms as UTF-8'
feed 'ta\xEF\xBF\xBDlu\n' derive "$velmari"   # U+FFFD itself is a character like any other
is_code 2; has_err '<stdin>:1:3: error: '; has_err '[unknown-character]'

# A decomposed spelling is the same symbol (ø has no decomposition; ɡ and g are equated).
run derive "$velmari" kog
is_out 'kok'

# --without: n stays, and the voiced obstruent too.
run derive "$velmari" --without 'nasal place' --without 'final devoicing' un-koɡ
is_code 0; is_out 'unkoɡ'
run derive "$velmari" --without 'no such rule' un-koɡ
is_code 2; has_err "'h loss'"

run derive "$velmari" --trace un-koɡ
is_code 0; has_out 'underlying'; has_out 'nasal place'; has_out 'uŋkok'
run derive "$velmari" --trace --format json un-koɡ
is_code 0; has_out '"rule": "nasal place"'; has_out '"surface": "uŋkok"'
done_testing
