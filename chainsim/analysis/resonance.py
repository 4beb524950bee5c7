"""Natural frequencies of the lift against its tooth rate."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.chain_motion import chain_speed
from chainsim.analysis.survey import Survey, survey
from chainsim.analysis.tensions import station_tension

TAKE_UP, STRAND = "take-up", "strand"


class Mode(NamedTuple):
    """One natural mode beside what excites it.

    Attributes
    ----------
    kind : str
        What moves most, such as ``"take-up tail"`` or ``"strand tail-head 1"``.
    frequency : float
        Natural frequency of the lift at rest [Hz].
    running : float
        The same of a strand that runs at the steady chain speed [Hz]: lower by ``v²/c²``, with
        ``c = 2 L f``; equal to `frequency` for everything else.
    is_judged : bool
        Whether a finding is judged on it: a take-up, or the first mode of a strand.
    """

    kind: str
    frequency: float
    running: float
    is_judged: bool


class Nearness(NamedTuple):
    """How near one mode is to one excitation.

    Attributes
    ----------
    mode : Mode
        The mode.
    excitation : float
        Tooth rate or half of it [Hz].
    is_half : bool
        Whether it is half of the tooth rate.
    distance : float
        ``|f − excitation| / excitation``, the lesser one of the frequencies at rest and
        running [dimensionless].
    """

    mode: Mode
    excitation: float
    is_half: bool
    distance: float


def modes(rec: Any) -> list[Mode]:
    """Natural modes of the lift, from its eigenvalues at rest.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of Mode
        In rising order of frequency; empty where none were worked out.

    References
    ----------
    Moving strand: F. R. Archibald and A. G. Emslie, "The vibration of a string having a uniform
    motion along its length", *Journal of Applied Mechanics* 25, 1958, p. 347 (from memory).
    """
    s = survey(rec)
    found = [
        Mode(row.kind, row.frequency, _running(s, row.kind, row.frequency), _is_judged(row.kind))
        for row in s.rec.modes
        if np.isfinite(row.frequency) and row.frequency > 0.0
    ]
    return sorted(found, key=lambda mode: mode.frequency)


def _is_judged(kind: str) -> bool:
    """Whether a mode is a take-up's, or the first of a strand."""
    return kind.startswith(TAKE_UP) or (kind.startswith(STRAND) and kind.split()[-1] == "1")


def _running(s: Survey, kind: str, frequency: float) -> float:
    """Frequency of a strand's mode while it runs [Hz]."""
    if not kind.startswith(STRAND):
        return frequency
    name, order = kind.removeprefix(STRAND).split()
    length = strand_length(s, name)
    speed = s.steady_speed
    if not (np.isfinite(length) and np.isfinite(speed) and order.isdigit()):
        return frequency
    wave = 2.0 * length * frequency / int(order)
    return max(frequency * (1.0 - (speed / wave) ** 2), 0.0)


def strand_length(rec: Any, name: str) -> float:
    """Distance between the end pins of a strand at rest.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    name : str
        Name of the strand.

    Returns
    -------
    float
        Length [m]; NaN where there is no such strand.
    """
    s = survey(rec)
    for strand, pins in zip(s.strands, s.strand_pins, strict=True):
        if strand.name == name and pins.is_known[0]:
            first, last = s.position[0, pins.first[0]], s.position[0, pins.last[0]]
            return float(np.hypot(*(last - first)))
    return float("nan")


def nearness(rec: Any) -> list[Nearness]:
    """Distance of every mode from the tooth rate; of strands also from half of it.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of Nearness
        Nearest first; empty where nothing ran steadily or no modes are known. A tension that
        pulses at the tooth rate shakes a strand up where its frequency is half of that.
    """
    s = survey(rec)
    rate = s.tooth_rate
    if not np.isfinite(rate) or rate <= 0.0:
        return []
    found = []
    for mode in modes(s):
        excitations = [(rate, False)]
        if mode.kind.startswith(STRAND):
            excitations.append((0.5 * rate, True))
        for excitation, is_half in excitations:
            near = min(abs(mode.frequency - excitation), abs(mode.running - excitation))
            found.append(Nearness(mode, excitation, is_half, near / excitation))
    return sorted(found, key=lambda near: near.distance)


def string_frequency_of_run(rec: Any, strand: int) -> float:
    """First frequency that a strand has while it runs, from its mean tension.

    Beside the eigenvalues: the strand as a uniform string with the mass of its links, carriers
    and balls spread out, between its end pins, at its mean tension of steady running,
    ``f = c (1 − v²/c²) / (2 L)`` with ``c = sqrt(T/m)``.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    float
        Frequency [Hz]; NaN where nothing ran steadily, or the mean tension is not positive.
    """
    s = survey(rec)
    tension = station_tension(s, strand).tension[s.is_steady]
    if not tension.size or not np.isfinite(tension).any():
        return float("nan")
    pull, speed = float(np.nanmean(tension)), float(np.nanmean(chain_speed(s)[s.is_steady]))
    length = strand_length(s, s.strands[strand].name)
    wave = np.sqrt(pull / _mass_per_length(s, strand)) if pull > 0.0 else float("nan")
    return float(wave * (1.0 - (speed / wave) ** 2) / (2.0 * length))


def _mass_per_length(s: Survey, strand: int) -> float:
    """Mass of chain, carriers and carried balls of a strand, spread over its length [kg/m]."""
    scenario = s.scenario
    mass = scenario.chain.link_mass / s.pitch
    carrier_link = s.channel("geometry/carrier_link")
    if scenario.carriers is None or carrier_link is None:
        return float(mass)
    per_link = len(carrier_link) / (s.n_pins * s.pitch)
    mass += scenario.carriers.mass * per_link
    loaded = s.channel("carriers/loaded")
    pins = s.strand_pins[strand]
    samples = np.flatnonzero(s.is_steady & pins.is_known)
    if scenario.balls is not None and loaded is not None and samples.size:
        n_links = pins.n_links[samples]
        ahead = (carrier_link[None, :] - pins.first[samples, None]) % s.n_pins
        aboard = np.where(ahead < n_links[:, None], loaded[samples], 0).sum(axis=1)
        mass += scenario.balls.mass * float(aboard.mean()) / (float(n_links.mean()) * s.pitch)
    return float(mass)
