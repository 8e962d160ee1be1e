"""Tables that were damaged by chance: read, or refused with the file named; nothing else ever comes out."""

import random
import warnings

import numpy as np
import pytest
from measurements.tables import CSV, DESCRIPTION, POINTS, TOML
from scalewright import InputWarning, Measurements, ScalewrightError

MATRIX = "1e-4,2e-5,0\n2e-5,4e-4,0\n0,0,9e-4\n"
LISTED = (
    '\n[[covariance]]\nfile = "m.csv"\nkind = "covariance"\ngiven_in = "value"\nscales_with = "nothing"\n'
)
SCRAPS = [
    "", "0", "-1", "nan", "inf", "1e999", "1_0", "1,5", '"', "'", "[", "]", "{", "}", "=", "\n", "\r\n",
    "\t", ",,", "é", "\x00", "\ufeff", "true", "[[datum]]\n", "1979-05-27", "[combination]\n",
    "\u0663", "null", "#", "0x10", "9" * 400,
]  # fmt: skip
TRIALS = 300


def damaged(text, dice):
    """Delete, repeat, swap or replace a part, once or twice."""
    for _ in range(dice.randint(1, 2)):
        lines = text.splitlines(keepends=True) or [""]
        start, end = sorted(dice.randrange(len(text) + 1) for _ in range(2))
        end = min(end, start + dice.choice([0, 1, 1, 3, 40]))
        way = dice.randrange(5)
        if way == 0:
            text = text[:start] + text[end:]
        elif way == 1:
            text = text[:start] + dice.choice(SCRAPS) + text[end:]
        elif way == 2:
            dice.shuffle(lines)
            text = "".join(lines)
        elif way == 3:
            text = "".join([*lines, dice.choice(lines)])
        else:
            words = text.split(" ")
            words[dice.randrange(len(words))] = dice.choice([*SCRAPS, *words])
            text = " ".join(words)
    return text


@pytest.mark.parametrize("seed", range(3))
def test_damaged_tables_are_read_or_refused(tmp_path, seed):
    dice = random.Random(seed)
    originals = [
        {"a.toml": TOML + LISTED, "run1.csv": CSV, "m.csv": MATRIX},
        {"a.toml": DESCRIPTION, "bins.csv": POINTS},
    ]
    outcomes = {"read": 0, "refused": 0}
    for _ in range(TRIALS):
        files = dict(dice.choice(originals))
        name = dice.choice(list(files))
        files[name] = damaged(files[name], dice)
        for file, text in files.items():
            (tmp_path / file).write_text(text, encoding="utf-8", newline="")
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore", InputWarning)
                table = Measurements.read(tmp_path / "a.toml")
        except ScalewrightError as error:
            assert "\n" not in str(error) and not str(error).endswith("."), str(error)
            outcomes["refused"] += 1
            continue
        assert str(table) and np.isfinite(table.value).all() and np.isfinite(table.covariance()).all()
        table.write(tmp_path / "back.toml")
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", InputWarning)
            assert Measurements.read(tmp_path / "back.toml") == table
        outcomes["read"] += 1
    # both must happen, or nothing was tried: about one in eight is still a table
    assert min(outcomes.values()) > TRIALS // 20
