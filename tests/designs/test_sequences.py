"""Groups and sequences against expansions that are plainly right."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from filmstack.expand import expand, fold
from filmstack.files.sequence import SequenceError, count_layers, letters_of, parse_sequence

LETTERS = {
    "H": {"material": "high", "quarter_waves": 1},
    "L": {"material": "low", "quarter_waves": 1.0},
    "c": {"material": "cavity", "thickness_nm": 100, "locked": True},
}


def spell(text):
    """Layers of a sequence as (letter of the material, thickness as written)."""
    return [
        (piece.material[0], piece.thickness_nm if piece.quarter_waves is None else piece.quarter_waves)
        for piece in expand([{"sequence": text}], LETTERS)
    ]


h, l = ("h", 1.0), ("l", 1.0)  # noqa: E741 - as in the textbooks


# Common practice of textbooks, no source: powers repeat, numbers before a letter scale its thickness.
@pytest.mark.parametrize(
    ("text", "layers"),
    [
        ("H", [h]),
        ("HLH", [h, l, h]),
        ("  H   L ", [h, l]),
        ("(H L)^2", [h, l, h, l]),
        ("(HL)^2H", [h, l, h, l, h]),
        ("(H L)^7 0.5H", [h, l] * 7 + [("h", 0.5)]),
        ("HL2HLH", [h, l, ("h", 2.0), l, h]),
        ("H^3", [h, h, h]),
        (".5H 2.L", [("h", 0.5), ("l", 2.0)]),
        ("(0.5L H 0.5L)^2", [("l", 0.5), h, ("l", 0.5)] * 2),
        ("2(H 0.5L)", [("h", 2.0), ("l", 1.0)]),
        ("2(H 0.5L)^2", [("h", 2.0), ("l", 1.0)] * 2),
        ("((H L)^2 c)^2 L", [h, l, h, l, ("c", 100.0)] * 2 + [l]),
        ("0.5(2(H L) ^ 2 c)", [h, l, h, l, ("c", 50.0)]),
        ("(((H)))^1", [h]),
    ],
)
def test_a_sequence_stands_for_its_layers(text, layers):
    assert spell(text) == layers
    assert count_layers(parse_sequence(text)) == len(layers)


def test_letters_keep_their_lock_and_place():
    pieces = expand([{"sequence": "(H c)^2"}], LETTERS)
    assert [piece.locked for piece in pieces] == [False, True, False, True]
    assert [piece.place for piece in pieces] == ["letters.H", "letters.c"] * 2


def test_letters_of_a_sequence_are_told_once():
    assert list(letters_of(parse_sequence("(H L)^2 (c H)"))) == ["H", "L", "c"]


def test_a_factor_of_one_changes_no_bit():
    letters = {"H": {"material": "high", "thickness_nm": 0.1 + 0.2}}
    assert expand([{"sequence": "H"}], letters)[0].thickness_nm == 0.1 + 0.2


@st.composite
def trees(draw, depth=3):
    """A sequence as text, and the layers it stands for, worked out beside it."""
    text, layers = "", []
    for _ in range(draw(st.integers(1, 3))):
        factor = draw(st.sampled_from(["", "0.5", "2", "1.25 "]))
        power = draw(st.integers(0, 3))
        if depth and draw(st.booleans()):
            inner, inside = draw(trees(depth=depth - 1))
            body = f"({inner})"
        else:
            body = draw(st.sampled_from("HL"))
            inside = [(body.lower(), 1.0)]
        text += f"{draw(st.sampled_from(['', ' ']))}{factor}{body}" + (f"^{power} " if power else "")
        layers += [(name, float(factor or 1) * waves) for name, waves in inside] * (power or 1)
    return text, layers


@settings(deadline=None)
@given(trees())
def test_any_sequence_stands_for_its_layers(tree):
    text, layers = tree
    spelled = spell(text)
    assert [name for name, _ in spelled] == [name for name, _ in layers]
    assert [waves for _, waves in spelled] == pytest.approx([waves for _, waves in layers], rel=1e-14)


@settings(deadline=None)
@given(st.text(alphabet="HL()^0123456789. /", max_size=12))
def test_any_text_is_a_sequence_or_has_one_clear_fault(text):
    try:
        read = letters_of(parse_sequence(text))
    except SequenceError as error:
        fault = error
    else:
        fault = None
        assert set(read) <= {"H", "L"}
    assert fault is None or (1 <= fault.place <= len(text) and fault.problem.startswith("expected "))


def test_a_group_repeats_its_layers_in_order():
    group = {
        "repeat": 2,
        "layers": [
            {"material": "a", "thickness_nm": 1},
            {"repeat": 3, "layers": [{"material": "b", "thickness_nm": 2}, {"sequence": "H"}]},
        ],
    }
    pieces = expand([{"material": "z", "thickness_nm": 9}, group], LETTERS)
    assert [piece.material for piece in pieces] == ["z", *["a", *["b", "high"] * 3] * 2]
    assert [piece.place for piece in pieces[:4]] == [
        "layer[1]",
        "layer[2].layers[1]",
        "layer[2].layers[2].layers[1]",
        "letters.H",
    ]


ENTRIES = [
    {"material": "a", "quarter_waves": 0.5, "locked": True},
    {"repeat": 2, "layers": [{"material": "a", "thickness_nm": 1}, {"material": "b", "thickness_nm": 2}]},
    {"sequence": "(H L)^2"},
]
NM = [10.0, 1.0, 2.0, 1.0, 2.0, 60.0, 90.0, 60.0, 90.0]


@pytest.mark.parametrize(
    ("changes", "folded"),
    [
        ({}, ENTRIES),
        ({0: 11.0}, [{"material": "a", "thickness_nm": 11.0, "locked": True}, *ENTRIES[1:]]),
        (
            {1: 3.0, 3: 3.0},
            [
                ENTRIES[0],
                {"repeat": 2, "layers": [{"material": "a", "thickness_nm": 3.0}, {"material": "b", "thickness_nm": 2}]},
                ENTRIES[2],
            ],
        ),
        (
            {1: 3.0},
            [
                ENTRIES[0],
                {"material": "a", "thickness_nm": 3.0},
                {"material": "b", "thickness_nm": 2.0},
                {"material": "a", "thickness_nm": 1.0},
                {"material": "b", "thickness_nm": 2.0},
                ENTRIES[2],
            ],
        ),
        (
            {8: 91.0},
            [
                *ENTRIES[:2],
                {"material": "high", "thickness_nm": 60.0},
                {"material": "low", "thickness_nm": 90.0},
                {"material": "high", "thickness_nm": 60.0},
                {"material": "low", "thickness_nm": 91.0},
            ],
        ),
    ],
)
def test_what_did_not_change_stays_as_written(changes, folded):
    new = [changes.get(number, thickness) for number, thickness in enumerate(NM)]
    assert fold(ENTRIES, LETTERS, NM, new) == folded
