"""The scanner finds the line of every key, however it is written."""

import pytest

from chainsim.scenario.locate import key_lines, line_of

TEXT = '''\
# comment with [brackets] = "quotes"
title = """two
lines""" # and more
a.b."c d" = 'x # no comment'
[frame] # a table
tilt = "1 deg"
[[sprocket]]
name = "head"
center = [
  "0 mm", # first
  "5 mm",
]
mount = { kind = "hung", center_of_mass = ["0 mm", "1 mm"] }
[sprocket.tooth]
friction = 0.2
[[sprocket]]
name = "tail"
note = \'\'\'
[not.a.table]
\'\'\'
escaped = "a \\" ] }"
[ "bench" ]
"chain.pitch" = { low = 1 }
'''

EXPECTED = {
    ("title",): 2,
    ("a", "b", "c d"): 4,
    ("frame",): 5,
    ("frame", "tilt"): 6,
    ("sprocket", 0): 7,
    ("sprocket", 0, "name"): 8,
    ("sprocket", 0, "center"): 9,
    ("sprocket", 0, "center", 0): 10,
    ("sprocket", 0, "center", 1): 11,
    ("sprocket", 0, "mount", "kind"): 13,
    ("sprocket", 0, "mount", "center_of_mass", 1): 13,
    ("sprocket", 0, "tooth"): 14,
    ("sprocket", 0, "tooth", "friction"): 15,
    ("sprocket", 1): 16,
    ("sprocket", 1, "name"): 17,
    ("sprocket", 1, "note"): 18,
    ("sprocket", 1, "escaped"): 21,
    ("bench",): 22,
    ("bench", "chain.pitch", "low"): 23,
}


@pytest.mark.parametrize(("path", "line"), EXPECTED.items(), ids=str)
def test_line_of_a_key(path, line):
    assert key_lines(TEXT)[path] == line


def test_no_key_is_invented():
    assert all("not" not in map(str, path) for path in key_lines(TEXT))


@pytest.mark.parametrize(
    ("path", "line"), [(("sprocket", 1, "teeth"), 16), (("frame", "x", "y"), 5), (("drive",), 1)]
)
def test_a_missing_key_goes_by_its_table(path, line):
    assert line_of(path, key_lines(TEXT)) == line


def test_windows_line_ends_count_once():
    assert key_lines(TEXT.replace("\n", "\r\n")) == key_lines(TEXT)
