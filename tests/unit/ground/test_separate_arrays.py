"""The promise that arrays do not overlap has to reach the compiler, or the kernels are slow (not wrong)."""

import re
from typing import NamedTuple

import numpy as np
from numba import njit

from probsoil.ground._separate_arrays import arrays_are_separate


class Pair(NamedTuple):
    first: np.ndarray
    second: np.ndarray


def test_every_array_is_marked_in_the_compiled_code():
    @njit
    def total(pair, out):
        arrays_are_separate()
        for i in range(out.size):
            out[i] = pair.first[i] + pair.second[i]

    out = np.zeros(3)
    total(Pair(np.ones(3), np.full(3, 2.0)), out)
    assert out.tolist() == [3.0, 3.0, 3.0]
    (code,) = total.inspect_llvm().values()
    head = next(line for line in code.splitlines() if line.startswith("define") and "%arg.out.4" in line)
    for data in ("arg.pair.0.4", "arg.pair.1.4", "arg.out.4"):  # fifth member of an array: its data
        assert re.search(rf"noalias[^,]*%{re.escape(data)}\b", head)
