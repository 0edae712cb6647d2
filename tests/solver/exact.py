"""The loop solved in 50 digits from the circuit's own equations, sharing no code with `rlc`.

The parts are taken as the doubles that they are; sums of resistances and inductances are exact.
"""

from dataclasses import dataclass, fields

import mpmath
import numpy as np
from mpmath import mp, mpc, mpf

from rlc.solver.case import Case
from rlc.solver.shapes import Surge

DIGITS = 50


@dataclass(frozen=True)
class Moment:
    """The loop at one moment: states, source and terminal voltages [V], [A]."""

    dielectric: mpf
    current: mpf
    source: mpf
    resistor: mpf
    inductor: mpf
    capacitor: mpf


class Exact:
    """One switch-on of one loop; attributes are the usual symbols."""

    def __init__(self, case: Case) -> None:
        loop = case.loop
        parts = {field.name: float(getattr(loop, field.name)) for field in fields(loop)}
        with mp.workdps(DIGITS):
            mpfs = {name: mpf(value) for name, value in parts.items()}
            self.R, self.C = mpfs["resistance"], mpfs["capacitance"]
            self.winding, self.r = mpfs["winding_resistance"], mpfs["series_resistance"]
            self.part_L = mpfs["inductance"]
            self.L = self.part_L + mpfs["source_inductance"]
            self.G = 1 / mpfs["load_resistance"]
            self.share = 1 / (1 + self.r * self.G)
            outer = self.R + self.winding + mpfs["source_resistance"]
            # C v' = share (i - G v);  L i' = u - (outer + share r) i - share v
            self.A = mpmath.matrix(
                [
                    [-self.G * self.share / self.C, self.share / self.C],
                    [-self.share / self.L, -(outer + self.share * self.r) / self.L],
                ]
            )
            self.gamma = -(self.A[0, 0] + self.A[1, 1])
            self.w0_squared = self.A[0, 0] * self.A[1, 1] - self.A[0, 1] * self.A[1, 0]
            self.amplitude = mpf(float(case.source.amplitude))
            self.omega = 2 * mp.pi * mpf(float(case.source.frequency))
            # a constant source is closed at its top
            turned = case.source.alternating
            self.angle = mpf(float(case.source.closing_angle)) if turned else mp.pi / 2
            self.lines, self.terms = case.lines, self._terms(case)
            self.start = mpf(float(case.capacitor_voltage)), mpf(float(case.initial_current))

    def _terms(self, case: Case) -> list[tuple]:
        """The source as the imaginary part of phasors times exp(p t): (phasor, p) of each."""
        if isinstance(case.source.shape, Surge):
            surge = case.source.shape
            scale, rates = mpf(surge.scale), (mpf(surge.slow), mpf(surge.fast))
            return [(mpc(0, scale), -rates[0]), (mpc(0, -scale), -rates[1])]
        return [
            (
                self.amplitude
                * mpf(order.share)
                * mp.expj(order.number * self.angle + mpf(order.phase)),
                mpc(0, order.number * self.omega),
            )
            for order in case.source.every_order
        ]

    @property
    def w0(self) -> mpf:
        """Natural angular frequency [rad/s]."""
        return mp.sqrt(self.w0_squared)

    def propagate(self, t: mpf, state: tuple) -> tuple:
        """exp(A t) times a state, from the two roots."""
        a = self.gamma / 2
        b = mp.sqrt(mpc(a * a - self.w0_squared))
        decay = mp.exp(-a * t)
        s = t * decay if b == 0 else decay * mp.sinh(b * t) / b
        c = decay * mp.cosh(b * t)
        A, (v, i) = self.A, state
        return (
            c * v + s * ((A[0, 0] + a) * v + A[0, 1] * i),
            c * i + s * (A[1, 0] * v + (A[1, 1] + a) * i),
        )

    def phasors(self, omega: mpf | None = None) -> tuple:
        """(j omega - A)^-1 b for a source of 1 V, by Cramer's rule."""
        return self.response(mpc(0, self.omega if omega is None else omega))

    def response(self, p: mpc) -> tuple:
        """(p - A)^-1 b for a source of exp(p t) volts."""
        A = self.A
        determinant = p * p + self.gamma * p + self.w0_squared
        return A[0, 1] / self.L / determinant, (p - A[0, 0]) / self.L / determinant

    def _along_lines(self, t: mpf) -> tuple:
        """States and source at a time, line by line: balance, lag and free motion."""
        A = self.A
        rest = mpmath.lu_solve(A, mpmath.matrix([0, -1 / self.L]))
        lag = mpmath.lu_solve(A, rest)
        lines, state = self.lines, self.start
        starts = [mpf(float(each)) for each in lines.start]
        for k, start in enumerate(starts):
            level, end = mpf(float(lines.level[k])), mpf(float(lines.end[k]))
            last = k + 1 == len(starts)
            slope = mpf(0) if last else (end - level) / (starts[k + 1] - start)
            since = t - start if last or t < starts[k + 1] else starts[k + 1] - start
            free = self.propagate(
                since, tuple(state[n] - rest[n] * level - lag[n] * slope for n in (0, 1))
            )
            source = level + slope * since
            state = tuple(rest[n] * source + lag[n] * slope + mp.re(free[n]) for n in (0, 1))
            if last or t < starts[k + 1]:
                break
        return *state, source

    def _under_terms(self, t: mpf) -> tuple:
        free = self.propagate(t, self.start)
        v, i, source = mp.re(free[0]), mp.re(free[1]), mpf(0)
        for phasor, p in self.terms:
            held = [phasor * each for each in self.response(p)]
            gone = self.propagate(t, held)
            ahead = mp.exp(p * t)
            v += (ahead * held[0] - gone[0]).imag
            i += (ahead * held[1] - gone[1]).imag
            source += (ahead * phasor).imag
        return v, i, source

    def at(self, time: float) -> Moment:
        """Everything at one time [s]."""
        with mp.workdps(DIGITS):
            t = mpf(float(time))
            v, i, source = (self._under_terms if self.lines is None else self._along_lines)(t)
            slope = mp.re(self.A[1, 0] * v + self.A[1, 1] * i) + source / self.L
            return Moment(
                dielectric=v,
                current=i,
                source=source,
                resistor=self.R * i,
                inductor=self.part_L * slope + self.winding * i,
                capacitor=self.share * (v + self.r * i),
            )


def worst_error(case: Case, times: np.ndarray, names: dict[str, str]) -> dict[str, float]:
    """Largest error of each named waveform, as a share of its running peak.

    The running peak is taken over the closing and the given times only, which makes it no
    larger than the true one and the figure no smaller.
    """
    exact = Exact(case)
    waves = case.waveforms(times)
    worst = {}
    closing = exact.at(0.0)
    moments = [exact.at(time) for time in times]
    for name, wave in names.items():
        peak, largest = abs(getattr(closing, name)), 0.0
        for moment, found in zip(moments, getattr(waves, wave), strict=True):
            value = getattr(moment, name)
            peak = max(peak, abs(value))
            if peak:
                largest = max(largest, float(abs(mpf(float(found)) - value) / peak))
            elif found != 0:
                largest = float("inf")
        worst[name] = largest
    return worst
