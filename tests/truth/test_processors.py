"""The same bytes on lesser processors: one rounding of every operation, whatever the width of the vectors."""

import os
import platform
import subprocess
import sys
from pathlib import Path

import pytest
from truth.digests import coherent_digests

LESSER = {
    # numba compiles for the named processor: neither wide vectors nor fused operations.
    "no fused operations": {"NUMBA_CPU_NAME": "x86-64", "NUMBA_CPU_FEATURES": ""},
    # numpy takes its loops without AVX-512; numba's processor has none either.
    "no AVX-512": {
        "NUMBA_CPU_NAME": "x86-64-v3",
        "NUMBA_CPU_FEATURES": "",
        "NPY_DISABLE_CPU_FEATURES": "X86_V4 AVX512_ICL AVX512_SPR",
    },
}


def test_both_routes_give_the_same_digests():
    assert coherent_digests("small") == coherent_digests("compiled")


@pytest.mark.skipif(platform.machine() not in ("x86_64", "AMD64"), reason="names processors of one family")
@pytest.mark.parametrize("processor", LESSER)
def test_lesser_processors_give_the_same_bytes(processor):
    here = [f"{route} {name} {digest}" for route in ("small", "compiled")
            for name, digest in coherent_digests(route).items()]  # fmt: skip
    script = Path(__file__).with_name("digests.py")
    run = subprocess.run(
        [sys.executable, "-W", "ignore", str(script)],
        env=os.environ | LESSER[processor],
        capture_output=True,
        text=True,
        check=True,
    )
    assert run.stdout.splitlines() == here
