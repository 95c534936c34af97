"""Where keys stand in TOML that is awkward to look through."""

from __future__ import annotations

from featherlog.exchange.toml_lines import key_lines, line_of, path_text

TEXT = '''# [not.a.table]
top = "a # no comment" # one
"odd = key" = \'\'\'
[not]
it = 1\'\'\'
[a."b.c"]
list = [ # [x]
  "]", 1,
]
text = """
"quoted" \\"""
y = 2"""""
[[many]]
a.b = 1
[[many.inner]]
[[many.inner]]
last = { k = 1 }
[[many]]
[many.sub]
z = 1
'''


def test_strings_comments_and_brackets_hide_no_key_and_show_none() -> None:
    assert key_lines(TEXT) == {
        ("top",): 2,
        ("odd = key",): 3,
        ("a", "b.c"): 6,
        ("a", "b.c", "list"): 7,
        ("a", "b.c", "text"): 10,
        ("many",): 13,
        ("many", 0): 13,
        ("many", 0, "a", "b"): 14,
        ("many", 0, "inner"): 15,
        ("many", 0, "inner", 0): 15,
        ("many", 0, "inner", 1): 16,
        ("many", 0, "inner", 1, "last"): 17,
        ("many", 1): 18,
        ("many", 1, "sub"): 19,
        ("many", 1, "sub", "z"): 20,
    }


def test_a_key_inside_an_inline_table_has_the_line_of_the_table() -> None:
    assert line_of(("many", 0, "inner", 1, "last", "k"), key_lines(TEXT)) == 17
    assert line_of(("nowhere",), key_lines(TEXT)) is None


def test_places_are_counted_from_one_and_odd_names_quoted() -> None:
    assert path_text(("field", 1, "beam", 0, "ssd_cm")) == "field[2].beam[1].ssd_cm"
    assert path_text(("meterset_mu", "AP upper")) == 'meterset_mu."AP upper"'
