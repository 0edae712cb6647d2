"""Series resistor-inductor-capacitor loops, judged from one sheet of real parts.

>>> import rlc
>>> loop = rlc.Loop(resistance="12 ohm", inductance="33 mH", capacitance="1u0")
>>> case = rlc.Case(loop, rlc.sine(rms="24 V", frequency="880 Hz"))
>>> round(float(case.quantity("natural_frequency")), 2)
876.12
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

__version__ = "0.1.0"

# Where each public name lives; nothing is imported before it is asked for.
_PUBLIC = {
    "check": "rlc.review",
    "Review": "rlc.review",
    "Loop": "rlc.front.values",
    "Case": "rlc.front.values",
    "constant": "rlc.front.drives",
    "sine": "rlc.front.drives",
    "harmonics": "rlc.front.drives",
    "ramp": "rlc.front.drives",
    "pulse": "rlc.front.drives",
    "surge": "rlc.front.drives",
    "recorded": "rlc.front.drives",
    "REGISTER": "rlc.solver.quantities",
    "RlcError": "rlc.errors",
    "InputError": "rlc.errors",
    "SheetError": "rlc.errors",
}

__all__ = ["__version__", *_PUBLIC]


def __getattr__(name: str) -> Any:
    if name not in _PUBLIC:
        raise AttributeError(f"module 'rlc' has no attribute {name!r}")
    return getattr(import_module(_PUBLIC[name]), name)


def __dir__() -> list[str]:
    return sorted(__all__)
