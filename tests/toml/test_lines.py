"""The line of each key of a TOML text."""

from __future__ import annotations

import tomllib

from optimizer.toml.lines import key_lines

LINES = r"""
# comment = 1
top = $$$
inside = 2
\$$$ "" \"$$$
dotted . "quo.ted" . 'x' = 1   # after
[table]  # [no]
list = [ # a ] b
  1, { deep = [
    "]", 'it # is'
]}
]
[ table . sub ]
date = 1979-05-27 07:32:00Z
raw = '''
[fake]
'''
inline = { a = 1, b.c = "}" }
[[many]]
x = 1
[[many]]
x = 2
[many.sub]
y = 3
[[many.deep.er]]
z = 4
[[many.deep.er]]
z = 5
""".replace("$", '"')


def test_lines_of_keys() -> None:
    assert tomllib.loads(LINES)["top"] == 'inside = 2\n""" "" "'
    lines = key_lines(LINES)
    assert lines[("top",)] == 3
    assert lines[("dotted",)] == lines[("dotted", "quo.ted", "x")] == 6
    assert lines[("table",)] == 7
    assert lines[("table", "list", 0)] == 9
    assert lines[("table", "list", 1, "deep", 1)] == 10
    assert lines[("table", "sub", "date")] == 14
    assert lines[("table", "sub", "raw")] == 15
    assert lines[("table", "sub", "inline", "b", "c")] == 18
    assert lines[("many",)] == lines[("many", 0)] == 19
    assert lines[("many", 0, "x")] == 20
    assert lines[("many", 1, "x")] == 22
    assert lines[("many", 1, "sub", "y")] == 24
    assert lines[("many", 1, "deep", "er", 0, "z")] == 26
    assert lines[("many", 1, "deep", "er", 1)] == 27
    assert ("fake",) not in lines
    assert ("inside",) not in lines


def test_lines_of_a_text_that_the_scanner_does_not_follow_are_left_out() -> None:
    assert key_lines("a = 1\n= 2\nb = 3\n") == {("a",): 1}
