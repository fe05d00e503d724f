"""When something counts as a fault: every limit the search goes by, in one place.

They are our own, chosen so that a clean ride lists none; none of them changes a value by itself. SI throughout.
"""

from __future__ import annotations

from typing import Final

# Records and clock
NEIGHBOURHOOD: Final = 31  # intervals whose median is the local record interval
REGULAR: Final = 0.25  # an interval this close to the local one is regular, relative
REGULAR_SHARE: Final = 0.7  # below this share of regular intervals the record is irregular
SMART_INTERVAL: Final = 1.5  # an irregular record with longer intervals than this was thinned out [s]
SMART_GAP: Final = 30.0  # in a thinned-out record only a longer interval is a gap [s]
GAP_FACTOR: Final = 1.5  # of the local interval
GAP_EXCESS: Final = 0.5  # and at least this much longer than it [s]
MIXED_RECORDS: Final = 30  # this many at another interval make the sampling mixed
FEW_OUT_OF_ORDER: Final = 5  # records; more that run backward are a clock that was set

# Pauses
PAUSE_SHORTEST: Final = 5.0  # [s]
PAUSE_SPEED: Final = 2.5  # at most this fast before and after [m/s]
PAUSE_DISTANCE: Final = 30.0  # at most this far between [m]

# Positions and altitude
POSITION_JUMP: Final = 30.0  # at least, for a fix to be wild [m]
POSITION_SPEED: Final = 35.0  # faster between fixes is wild where no speed is known [m/s]
POSITION_SPEED_FACTOR: Final = 2.5  # of the known speed
POSITION_SPEED_EXCESS: Final = 15.0  # and this much on top [m/s]
POSITION_RETURN: Final = 60.0  # within this the track must come back [s]
FIRST_FIXES: Final = 15  # records at the start that may precede a lock
ALTITUDE_STEP: Final = 4.0  # at least [m]
ALTITUDE_GRADE: Final = 0.4  # steeper than any road, rise over run
ALTITUDE_NOISE_FACTOR: Final = 10.0  # times the usual change from record to record

# Channels
MISSING_SPAN: Final = 10.0  # a shorter hole in a channel is not worth a line [s]
SPEED_ZERO_FROM: Final = 5.0  # a wheel that reads zero between speeds above these did not stop [m/s]
SPEED_ZERO_TO: Final = 4.0  # [m/s]
FROZEN_CHANCE: Final = 1e-4  # expected number of such runs of equal values in a sound ride
FROZEN_SHORTEST: Final = 6  # records
FROZEN_POSITION: Final = 5.0  # a fix that stays while the wheel turns this long [s]
MOVING: Final = 3.0  # surely moving [m/s]
SMOOTHED_LONGEST: Final = 15  # records a running mean may cover
SMOOTHED_CORRELATION: Final = 0.1  # of neighbouring changes
SMOOTHED_RETURN: Final = -0.15  # of changes one window apart
SMOOTHED_BEND: Final = 0.25  # of that correlation at the window
SMOOTHED_FEWEST: Final = 300  # records
HELD_SHARE: Final = 0.6  # of runs of equal values that have one length

# Power
POWER_LIMIT: Final = 2200.0  # more is not believed, however it accelerates [W]
POWER_EXCESS: Final = 500.0  # above the minute about it [W]
SPIKE_LONGEST: Final = 10.0  # [s]
SPIKE_ENERGY: Final = 0.3  # share of the excess work that must show as speed
NOMINAL_MASS: Final = 85.0  # of rider and bike, to judge whether a surge could be real [kg]
NOMINAL_DRAG: Final = 0.5 * 1.2 * 0.30 / NOMINAL_MASS  # ½ ρ CdA over mass, for the same purpose [1/m]
DROPOUT_SHORT: Final = 3.0  # [s]
DROPOUT_LONGEST: Final = 60.0  # [s]
DROPOUT_POWER: Final = 80.0  # steady power about a dropout [W]
DROPOUT_SLOWING: Final = 0.4  # of the slowing that real coasting would cause
PEDALLING: Final = 0.5  # cadence that is surely pedalling [Hz]

# Wheel and satellite
JITTER: Final = (
    0.05  # a speed from fixes must scatter this much before it can be told apart, by its median [m/s]
)
JITTER_CORRELATION: Final = 0.7  # between the scatter of speed and of fixes
CHORD_TIME: Final = 12.0  # straight pieces compared [s]
CHORD_TURN: Final = 0.09  # change of heading allowed in one [rad]
CIRCUMFERENCE_OFFSET: Final = 0.01  # of wheel distance against fixes, relative
CIRCUMFERENCE_DRIFT: Final = 0.005  # between hours, relative
SIGNIFICANT: Final = 4.0  # standard errors

# Lag of power
LAG_LONGEST: Final = 5.0  # searched [s]
LAG_SMALLEST: Final = 0.6  # reported [s]
LAG_CORRELATION: Final = 0.2  # at its best lag
LATE_SPEED: Final = 0.6  # a speed this late against power was filtered by a receiver [s]
LAG_BLOCKS: Final = 10  # left out in turn for the standard error
