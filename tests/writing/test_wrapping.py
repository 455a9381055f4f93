"""Comment lines are broken as textwrap breaks them."""

from __future__ import annotations

import textwrap

from hypothesis import given
from hypothesis import strategies as st

from heatwright.writing.comment import WIDTH, ascii_text, wrapped

words = st.text(st.sampled_from("abc-.,°é"), min_size=1, max_size=90)


@given(st.lists(words, max_size=40).map(" ".join))
def test_lines_are_those_of_textwrap(text: str) -> None:
    plain = ascii_text(text)
    expected = textwrap.wrap(plain, WIDTH, subsequent_indent="  ", break_on_hyphens=False)
    assert wrapped(text) == expected
    assert all(len(line) <= WIDTH for line in wrapped(text))
