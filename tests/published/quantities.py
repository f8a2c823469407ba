"""How each quantity in words is computed: a table from the words to a small function.

A `*` in the words stands for any text. A function takes the case's bench and the row and
returns the number to compare, or several where the row speaks of several answers.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import cache
from typing import Any

import numpy as np

from .bench import Asked, Bench, Row, cutoffs, roots, stepped

Measure = Callable[[Bench, Row], Any]


# -- complex numbers that rows are about --------------------------------------------------


def ratio(bench: Bench, row: Row) -> Any:
    """The transfer that the file asks for, at the row's frequency."""
    return bench.at(bench.transfer(), row.hertz)


def impedance(bench: Bench, row: Row) -> Any:
    """The impedance that the file asks for, at the row's frequency."""
    return bench.at(bench.impedance(), row.hertz)


def relative(hertz: float) -> Measure:
    """The transfer relative to the one at a fixed frequency."""
    return lambda bench, row: ratio(bench, row) / bench.at(bench.transfer(), hertz)


def between(source: Any, target: Any, variant: str | None = None) -> Measure:
    """The voltage ratio of two pairs that the row names."""
    return lambda bench, row: bench.at(bench.ratio(source, target, variant), row.hertz)


def with_variant(variant: str, pair: str) -> Measure:
    """The impedance of a pair in one of the file's variants."""
    return lambda bench, row: bench.at(bench.impedance(variant, pair), row.hertz)


def transimpedance(source: Any, target: Any) -> Measure:
    """The open-circuit voltage at one pair for each ampere into another."""
    return lambda bench, row: bench.at(
        Asked(bench.case, None, source, target, "transimpedance"), row.hertz
    )


def combined(*measures: Measure, signs: tuple[int, ...] = (1, 1)) -> Measure:
    """The sum or difference of several answers."""
    return lambda bench, row: sum(
        sign * measure(bench, row) for sign, measure in zip(signs, measures, strict=True)
    )


def both(*measures: Measure) -> Measure:
    """Several answers of which each must agree with the row."""
    return lambda bench, row: np.array([measure(bench, row) for measure in measures])


# -- the real numbers that are read off them ----------------------------------------------


def modulus(measure: Measure, *, times: float = 1.0) -> Measure:
    """The magnitude."""
    return lambda bench, row: times * abs(measure(bench, row))


def real(measure: Measure) -> Measure:
    """The real part."""
    return lambda bench, row: measure(bench, row).real


def imaginary(measure: Measure) -> Measure:
    """The imaginary part."""
    return lambda bench, row: measure(bench, row).imag


def phase(measure: Measure) -> Measure:
    """The phase in degrees."""
    return lambda bench, row: np.degrees(np.angle(measure(bench, row)))


def decibels(measure: Measure) -> Measure:
    """20·log10 of the magnitude."""
    return lambda bench, row: 20 * np.log10(abs(measure(bench, row)))


def loss(measure: Measure) -> Measure:
    """Decibels of attenuation."""
    return lambda bench, row: -decibels(measure)(bench, row)


WOOFER, TWEETER = between("in", "wo"), between("in", "tw")


# -- poles, zeros and cutoffs ---------------------------------------------------------------


def nearest(kind: str, asked: Callable[[Bench], Asked] = Bench.transfer) -> Measure:
    """The pole or zero nearest to the one that the row names."""

    def find(bench: Bench, row: Row) -> complex:
        return min(getattr(roots(asked(bench)), kind), key=lambda root: abs(root - row.wanted))

    return find


def cutoff(
    scale: Callable[[Bench], float] = lambda _: 1.0,
    *,
    unit: str = "rad_per_s",
    asked: Callable[[Bench], Asked] = Bench.transfer,
    place: int | None = None,
) -> Measure:
    """A half-power frequency times a scale; the only one there is unless a place is given."""

    def find(bench: Bench, row: Row) -> float:  # noqa: ARG001 - all measures are called alike
        found = cutoffs(asked(bench)).cutoffs
        assert place is not None or len(found) == 1
        return float(getattr(found[place or 0], unit) * scale(bench))

    return find


def bandwidth(bench: Bench, row: Row) -> float:  # noqa: ARG001
    """The distance in hertz of the two half-power frequencies."""
    low, high = cutoffs(bench.transfer()).cutoffs
    return float(high.hertz - low.hertz)


def peaking(bench: Bench, row: Row) -> float:  # noqa: ARG001
    """The largest magnitude of the impedance relative to the one at 0 Hz, in dB."""
    peak = cutoffs(bench.impedance(), reference="peak").reference.gain
    return float(20 * np.log10(peak / abs(bench.at(bench.impedance(), 0.0))))


# -- bands, delays, losses --------------------------------------------------------------------


def over(low: float, high: float | None, pick: Callable[[Any], Any]) -> Measure:
    """The extreme gain relative to d.c. over a band of angular frequencies, in dB."""

    def find(bench: Bench, row: Row) -> Any:
        omega = np.linspace(low, high, 4001) if high else np.geomspace(edge(row), 1e4, 8001)
        gains = bench.at(bench.transfer(), omega / (2 * np.pi))
        return pick(decibels(lambda *_: gains)(bench, row)) - decibels(ratio)(bench, row)

    return find


def edge(row: Row) -> float:
    """The stop-band edge in rad/s, which the case's title states."""
    stated = re.search(r"stop-band from ([\d.]+) rad/s", row.title)
    assert stated is not None
    return float(stated[1])


def at_edge(bench: Bench, row: Row) -> Any:
    """The transfer at the stop-band edge relative to d.c."""
    return bench.at(bench.transfer(), edge(row) / (2 * np.pi)) / ratio(bench, row)


def delay(asked: Callable[[Bench], Asked] = Bench.transfer, *, times: float = 1.0) -> Measure:
    """The group delay at the row's frequency; at 0 Hz the first moment of the impulse response."""
    return lambda bench, row: times * asked(bench).delay(row.hertz)


def insertion_loss(bench: Bench, row: Row) -> Any:
    """The loss against the same source and load joined directly."""
    source, load = bench.part("RS"), bench.part("RL")
    direct = load / (source + load) if load else 1.0
    return 20 * np.log10(direct / abs(ratio(bench, row)))


def power_loss(bench: Bench, row: Row) -> Any:
    """10·log10 of the source's available power over the power in the load."""
    available = 1 / (4 * bench.part("RS"))
    return 10 * np.log10(available * bench.part("RL") / abs(ratio(bench, row)) ** 2)


def image_impedance(bench: Bench, row: Row) -> Any:
    """The geometric mean of the impedances with the far end open and shorted."""
    ends = [with_variant(f"far end {end}", "n1")(bench, row) for end in ("open", "shorted")]
    return np.sqrt(np.prod(ends))


def input_resistance(bench: Bench, row: Row) -> Any:
    """The resistance looked into, without the source resistor where the file has one."""
    variant = "source removed" if bench.part("RS") else None
    return bench.at(bench.impedance(variant), row.hertz).real


def inductance(bench: Bench, row: Row) -> Any:  # noqa: ARG001
    """The reactance with the secondary shorted over omega, in mH; the same at any frequency."""
    shorted = bench.impedance("secondary shorted")
    return bench.at(shorted, 1e3).imag / (2 * np.pi * 1e3) * 1e3


def capacitance(bench: Bench, row: Row) -> Any:
    """The susceptance over omega, in pF."""
    return (1 / impedance(bench, row)).imag / (2 * np.pi * row.hertz) * 1e12


def named_resistance(bench: Bench, row: Row) -> Any:
    """The resistance between the two nodes that the row's words name."""
    first, second = re.findall(r"\((\w+),(\w+)\)", row.quantity)[0]
    return bench.at(bench.impedance(pair=(first, second)), row.hertz).real


def only_bit(bench: Bench, row: Row) -> Any:
    """The ratio from one bit's input while the others are grounded."""
    bit = row.quantity.split()[2]
    return between(bit, "n3", f"only {bit}")(bench, row).real


# -- design formulas: rows that belong to these, not to the solved circuit --------------------


def resonance(*names: str) -> Measure:
    """1/(2 pi sqrt(product of the parts)): the design formula of a balance or resonance."""
    return lambda bench, _: 1 / (2 * np.pi * np.sqrt(np.prod([bench.part(name) for name in names])))


def step(bench: Bench) -> Any:
    """The step response of the transfer that the file asks for."""
    return stepped(bench.transfer())


def at_time(bench: Bench, row: Row) -> float:
    """The step response at the row's time."""
    return float(step(bench).at(row.given["time_s"]))


def figure(name: str) -> Measure:
    """A figure of the step response."""
    return lambda bench, _: getattr(step(bench), name)


def overshoot(bench: Bench, row: Row) -> float:
    """The overshoot, which is also what the response is at the row's time."""
    found = step(bench)
    assert abs(found.peak_s - row.given["time_s"]) < 1e-12 * found.peak_s
    assert abs(at_time(bench, row) - 1 - found.overshoot) < 1e-12
    return float(found.overshoot)


def rise_times_bandwidth(bench: Bench, row: Row) -> float:
    """The 10 to 90 % rise time times the half-power frequency in hertz."""
    return float(step(bench).rise_s * cutoff(unit="hertz")(bench, row))


def elmore_rise(bench: Bench, row: Row) -> float:  # noqa: ARG001
    """sqrt(2 pi) times the width of the impulse response, over R1·C1."""
    return float(step(bench).moments.elmore_rise_s / time_constant(bench))


DESIGN: dict[str, Measure] = {
    "balance frequency [Hz]": resonance("R1", "R2", "C1", "C2"),
    "series resonance of the motional arm [Hz]": resonance("L1", "C1"),
}


def time_constant(bench: Bench) -> float:
    """R1·C1."""
    return bench.part("R1") * bench.part("C1")


TABLE: dict[str, Measure] = {
    # gains
    "gain [dB]": decibels(ratio),
    "gain (cited transfer function) [dB]": decibels(ratio),
    "gain at 1 kHz (absolute) [dB]": decibels(ratio),
    "gain at w Rt Ct = * [dB]": decibels(ratio),
    "de-emphasis gain [dB]": decibels(ratio),
    "gain relative to 1 kHz [dB]": decibels(relative(1000.0)),
    "20 Hz value as usually quoted [dB]": decibels(relative(1000.0)),
    "gain relative to d.c.* [dB]": decibels(relative(0.0)),
    "gain at 1 rad/s relative to d.c. [dB]": decibels(relative(0.0)),
    "stop-band edge gain at 2 rad/s * [dB]": decibels(relative(0.0)),
    "loss at resonance = * [dB]": loss(ratio),
    "gain [1]": real(ratio),
    "gain at *f0* [1]": modulus(ratio),
    "gain magnitude* [1]": modulus(ratio),
    "gain real [1]": real(ratio),
    "gain, real part [1]": real(ratio),
    "peak gain (inverting), real part [1]": real(ratio),
    "gain imaginary [1]": imaginary(ratio),
    "gain, imaginary part [1]": imaginary(ratio),
    "magnitude [1]": modulus(ratio),
    "magnitude of V* [1]": modulus(ratio),
    "|V(out)/V(in)| = * [1]": modulus(ratio),
    "*detector voltage* [1]": modulus(ratio),
    "*voltage ratio* [1]": real(ratio),
    "V(d1,d2)/V(p,n) = * [1]": real(ratio),
    "resonance peak = * [1]": modulus(ratio),
    "|load current| per volt = * [S]": lambda bench, row: abs(ratio(bench, row)) / bench.part("RL"),
    "phase* [degree]": phase(ratio),
    # several answers together
    "woofer gain [dB]": decibels(WOOFER),
    "tweeter gain [dB]": decibels(TWEETER),
    "gain of each branch at the crossover frequency [dB]": decibels(both(WOOFER, TWEETER)),
    "magnitude of woofer minus tweeter * [dB]": decibels(combined(WOOFER, TWEETER, signs=(1, -1))),
    "in-phase sum at the crossover: a null [1]": modulus(combined(WOOFER, TWEETER)),
    "sum (complex) real part [1]": real(combined(WOOFER, TWEETER)),
    "differential gain, * b grounded [1]": real(between("a", "out", "b grounded")),
    "source between b and gnd with a grounded [1]": real(between("b", "out", "a grounded")),
    "common-mode gain * [1]": real(between("a", "out", "a and b together")),
    "gain from b* (other inputs grounded) [1]": only_bit,
    # impedances
    "*impedance magnitude* [ohm]": modulus(impedance),
    "impedance modulus [ohm]": modulus(impedance),
    "impedance at d.c. [ohm]": modulus(impedance),
    "*impedance phase [degree]": phase(impedance),
    "*impedance real [ohm]": real(impedance),
    "input impedance, real [ohm]": real(impedance),
    "*impedance imaginary* [ohm]": imaginary(impedance),
    "input impedance, imaginary [ohm]": imaginary(impedance),
    "reactance X (Z = jX) [ohm]": imaginary(impedance),
    "input resistance* [ohm]": input_resistance,
    "resistance at (in,gnd) [ohm]": real(with_variant("source removed", "in")),
    "resistance at (out,gnd) [ohm]": real(with_variant("load removed, source shorted", "out")),
    "resistance (*), * open [ohm]": named_resistance,
    "image impedance [ohm]": modulus(image_impedance),
    "input inductance, secondary shorted = * [mH]": inductance,
    "input susceptance / w [pF]": capacitance,
    # voltages for each ampere
    "transfer impedance |U2/I| [ohm]": modulus(ratio),
    "20 log10(|U2/I| / 500 ohm) [dB]": decibels(modulus(ratio, times=1 / 500)),
    "U1/I transfer impedance magnitude (flat) [ohm]": modulus(transimpedance("in", "b")),
    "transfer resistance V(b,c)/I(a,c) [ohm]": real(transimpedance(("a", "c"), ("b", "c"))),
    # poles and zeros
    "*pole* [rad/s]": nearest("poles"),
    "*zero [rad/s]": nearest("zeros"),
    "impedance pole [rad/s]": nearest("poles", Bench.impedance),
    "impedance zero [rad/s]": nearest("zeros", Bench.impedance),
    # half-power frequencies
    "-3.0103 dB frequency [Hz]": cutoff(unit="hertz"),
    "corner frequency [Hz]": cutoff(unit="hertz"),
    "-3.0103 dB frequency of |Z| [Hz]": cutoff(unit="hertz", asked=Bench.impedance),
    "-3.0103 dB bandwidth = f0/Q [Hz]": bandwidth,
    "-3.0103 dB angular frequency [rad/s]": cutoff(),
    "-3.0103 dB angular frequency times total R times total C [1]": cutoff(
        lambda bench: bench.total("R") * bench.total("C")
    ),
    "-3.0103 dB frequency / natural frequency [1]": cutoff(
        lambda bench: float(np.sqrt(bench.part("L1") * bench.part("C1")))
    ),
    "overall 3 dB frequency / section corner = * [1]": cutoff(time_constant),
    "lower -3.0103 dB frequency / f0 = * [1]": cutoff(time_constant, place=0),
    "upper -3.0103 dB frequency / f0 = * [1]": cutoff(time_constant, place=1),
    "-3.0103 dB bandwidth / (1/RC): exact [1]": cutoff(time_constant, asked=Bench.impedance),
    "bandwidth extension as published [1]": cutoff(time_constant, asked=Bench.impedance),
    "peaking as published [dB]": peaking,
    # bands
    "maximum gain relative to d.c. in 0..1 rad/s [dB]": over(0.0, 1.0, max),
    "minimum gain relative to d.c. in 0..1 rad/s [dB]": over(0.0, 1.0, min),
    "pass-band minimum relative to d.c., 0..1 rad/s * [dB]": over(0.0, 1.0, min),
    "stop-band edge attenuation of the exact elliptic prototype * [dB]": loss(at_edge),
    "stop-band attenuation reached from the edge on * [dB]": lambda bench, row: (
        -over(edge(row), None, max)(bench, row)
    ),
    # losses and delays
    "insertion loss [dB]": insertion_loss,
    "*power loss* [dB]": power_loss,
    "loss as usually quoted [dB]": power_loss,
    "group delay* [s]": delay(),
    "delay to out = * [us]": delay(lambda bench: bench.ratio("in", "out"), times=1e6),
    "delay to x = * [us]": delay(lambda bench: bench.ratio("in", "x"), times=1e6),
    "T_D/RC [1]": lambda bench, row: delay()(bench, row) / time_constant(bench),
    # steps and moments
    "response at t = * [1]": at_time,
    "response at the first undershoot [1]": at_time,
    "50 % delay = ln 2 tau [s]": figure("delay_s"),
    "10-90 % rise time = ln 9 tau [s]": figure("rise_s"),
    "rise time times 3 dB bandwidth* [1]": rise_times_bandwidth,
    "overshoot = * [1]": overshoot,
    "T_R/RC [1]": elmore_rise,
    **DESIGN,
}


@cache
def measures(words: str) -> tuple[str, ...]:
    """The keys of the table that fit a quantity in words: the longest ones, if any."""
    fitting = [key for key in TABLE if re.fullmatch(re.escape(key).replace(r"\*", ".*"), words)]
    longest = max((len(key) for key in fitting), default=0)
    return tuple(key for key in fitting if len(key) == longest)
