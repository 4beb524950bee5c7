"""Numbers from a recording: nothing here knows a plot or judges anything."""

from chainsim.analysis.axles import (
    AxleLoad,
    Travel,
    WrapLoad,
    axle_loads,
    takeup_travel,
    travel_per_length,
    wrap_load,
)
from chainsim.analysis.carried import carried_balls
from chainsim.analysis.chain_motion import (
    N_HARMONICS,
    Excursion,
    Ripple,
    chain_speed,
    excursion,
    ripple,
    sag,
)
from chainsim.analysis.drive import Droop, Duty, droop, duty, stall
from chainsim.analysis.energy import Audit, energy_audit
from chainsim.analysis.gaps import Gap, smallest_gaps
from chainsim.analysis.losses import Loss, is_lost, losses
from chainsim.analysis.resonance import (
    Mode,
    Nearness,
    modes,
    nearness,
    strand_length,
    string_frequency_of_run,
)
from chainsim.analysis.ride import Ride, ball_acceleration, ride, ride_spectrum
from chainsim.analysis.series import Spectrum
from chainsim.analysis.slack import Taut, resting_tension, taut
from chainsim.analysis.steady import Window
from chainsim.analysis.stops import Overrun, RunBack, chain_travel, event_times, overrun, run_back
from chainsim.analysis.summary import UNITS, RunSummary, run_summary
from chainsim.analysis.survey import Strand, Survey, survey
from chainsim.analysis.tensions import (
    Sides,
    StationTension,
    StrandEnds,
    sides_of_drive,
    station_tension,
    strand_ends,
)
from chainsim.analysis.tilt import Tilt, ball_link_lean, carrier_tilts
from chainsim.analysis.work import Efficiency, efficiency, lift_height

__all__ = [
    "N_HARMONICS",
    "UNITS",
    "Audit",
    "AxleLoad",
    "Droop",
    "Duty",
    "Efficiency",
    "Excursion",
    "Gap",
    "Loss",
    "Mode",
    "Nearness",
    "Overrun",
    "Ride",
    "Ripple",
    "RunBack",
    "RunSummary",
    "Sides",
    "Spectrum",
    "StationTension",
    "Strand",
    "StrandEnds",
    "Survey",
    "Taut",
    "Tilt",
    "Travel",
    "Window",
    "WrapLoad",
    "axle_loads",
    "ball_acceleration",
    "ball_link_lean",
    "carried_balls",
    "carrier_tilts",
    "chain_speed",
    "chain_travel",
    "droop",
    "duty",
    "efficiency",
    "energy_audit",
    "event_times",
    "excursion",
    "is_lost",
    "lift_height",
    "losses",
    "modes",
    "nearness",
    "overrun",
    "resting_tension",
    "ride",
    "ride_spectrum",
    "ripple",
    "run_back",
    "run_summary",
    "sag",
    "sides_of_drive",
    "smallest_gaps",
    "stall",
    "station_tension",
    "strand_ends",
    "strand_length",
    "string_frequency_of_run",
    "survey",
    "takeup_travel",
    "taut",
    "travel_per_length",
    "wrap_load",
]
