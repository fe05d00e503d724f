"""Reader of FIT files: records, laps and pauses of an activity, and what its devices say of themselves."""

from __future__ import annotations

import datetime as dt
import io
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, BinaryIO

import numpy as np

from ridercda.errors import Cancelled, ReaderError
from ridercda.rides import notes as ride_notes
from ridercda.rides.assembly import FaultSpan, LapSpan, Records, assemble
from ridercda.rides.fit_frame import FitPart, is_fit, split_parts
from ridercda.rides.fit_records import TIMESTAMP, FitRecords, channels_of
from ridercda.rides.fit_sides import one_sided
from ridercda.rides.format import Reader, ReadOptions
from ridercda.rides.ride import Fault, FaultKind, FloatArray, LapTrigger, Ride
from ridercda.watch import Watch

if TYPE_CHECKING:
    from fitdecode import FitDataMessage

FIT_EPOCH = dt.datetime(1989, 12, 31, tzinfo=dt.UTC)
ABSOLUTE = 0x10000000  # smaller timestamps count from when the unit was switched on [s]

_LAP, _RECORD, _EVENT, _DEVICE_INFO, _FILE_ID, _ACTIVITY = 19, 20, 21, 23, 0, 34
_FRAMES_PER_STEP = 2048
_TRIGGERS = {
    "manual": LapTrigger.MANUAL,
    "time": LapTrigger.TIME,
    "distance": LapTrigger.DISTANCE,
    "position_start": LapTrigger.POSITION,
    "position_lap": LapTrigger.POSITION,
    "position_waypoint": LapTrigger.POSITION,
    "position_marked": LapTrigger.POSITION,
    "session_end": LapTrigger.SESSION_END,
}
_STOPS = frozenset({"stop", "stop_all", "stop_disable", "stop_disable_all"})
_WHEEL_SENSORS = frozenset({121, 123, "bike_speed_cadence", "bike_speed"})
_OTHER_SPEED_SOURCES = frozenset({11, 15, 17, 124, "bike_power", "fitness_equipment", "bike_trainer"})


@dataclass(slots=True)
class _Gathered:
    """What was found in one FIT file of the stream."""

    records: FitRecords
    laps: list[dict[str, object]] = field(default_factory=list)
    pauses: list[tuple[float, float, bool]] = field(default_factory=list)  # from, to, automatic
    stopped: tuple[float, bool] | None = None
    sensors: set[object] = field(default_factory=set)
    device: str = ""
    utc_offset: float | None = None
    damage: list[str] = field(default_factory=list)


def read_fit(stream: BinaryIO, options: ReadOptions, watch: Watch) -> Ride:
    """Return the raw ride of a FIT stream; chained files follow one another on one clock.

    Parameters
    ----------
    stream : binary stream
        Read to its end.
    options : ReadOptions
        `columns` and `power_channel` name fields of the record message, developer fields included.
    watch : Watch
        Told of the bytes decoded.

    Raises
    ------
    ReaderError
        If there is no FIT header, or no record with a time in it.

    Notes
    -----
    What a damaged file still holds is read, with a fault that says what is missing.
    """
    parts = split_parts(stream.read())
    total = sum(len(part.messages) for part in parts)
    gathered: list[_Gathered] = []
    done = 0
    for part in parts:
        gathered.append(_gather(part, tuple(options.names.values()), watch, done, total))
        done += len(part.messages)
    watch.step(total, total)
    return _ride_of(gathered, options)


READER = Reader("FIT", (".fit",), is_fit, read_fit)


def _gather(part: FitPart, asked: Sequence[str], watch: Watch, done: int, total: int) -> _Gathered:
    found = _Gathered(FitRecords(asked))
    if part.damage:
        found.damage.append(part.damage)
    body = io.BytesIO(part.sound_frame())
    take = found.records.take
    for count, message in enumerate(_messages(body, found.damage)):
        number = message.def_mesg.global_mesg_num
        if number == _RECORD:
            take(message)
        elif number == _LAP:
            found.laps.append(_values(message))
        elif number == _EVENT:
            _note_event(_values(message), found)
        elif number == _DEVICE_INFO:
            _note_sensor(_values(message), found)
        elif number == _FILE_ID:
            found.device = _device_name(_values(message))
        elif number == _ACTIVITY:
            found.utc_offset = _utc_offset(_values(message))
        if count % _FRAMES_PER_STEP == 0:
            watch.step(done + min(body.tell(), len(part.messages)), total)
    return found


def _messages(body: io.BytesIO, damage: list[str]) -> Iterator[FitDataMessage]:
    """Yield data messages until the end, or until the decoder can make nothing of what follows."""
    import fitdecode  # its profile takes 0.1 s to load

    # Checksums were looked at already; a processor would visit every field of every message.
    reader = fitdecode.FitReader(  # type: ignore[no-untyped-call]  # the decoder carries no types
        body,
        processor=None,
        check_crc=fitdecode.CrcCheck.DISABLED,
        error_handling=fitdecode.ErrorHandling.IGNORE,
    )
    frames = iter(reader)
    data = fitdecode.FIT_FRAME_DATA
    while True:
        try:
            frame = next(frames)
        except StopIteration:
            return
        except Cancelled:
            raise
        except Exception:  # noqa: BLE001 - damaged bytes make the decoder trip over anything: asserts, keys, types
            left = max(0, len(body.getbuffer()) - 2 - body.tell())
            if left or not damage:
                damage.append(f"its content cannot be read to the end, {left} bytes are left over")
            return
        if frame.frame_type == data:
            yield frame


def _values(message: FitDataMessage) -> dict[str, object]:
    return {each.name: each.value for each in message.fields if each.value is not None}


def _real(value: object) -> float | None:
    return float(value) if isinstance(value, int | float) else None


def _note_event(event: dict[str, object], found: _Gathered) -> None:
    at = _real(event.get(TIMESTAMP))
    if event.get("event") != "timer" or at is None:
        return
    kind = event.get("event_type")
    if kind in _STOPS:
        if found.stopped is None:
            found.stopped = (at, event.get("timer_trigger") == "auto")
    elif kind == "start" and found.stopped is not None:
        since, automatic = found.stopped
        found.stopped = None
        if at > since:
            found.pauses.append((since, at, automatic))


def _note_sensor(info: dict[str, object], found: _Gathered) -> None:
    for name in ("device_type", "antplus_device_type", "ble_device_type"):
        kind = info.get(name)
        if isinstance(kind, int | str):
            found.sensors.add(kind)


def _device_name(file_id: dict[str, object]) -> str:
    product = file_id.get("product_name") or file_id.get("garmin_product") or file_id.get("product")
    words = [str(word) for word in (file_id.get("manufacturer"), product) if word not in (None, "", 0)]
    return " ".join(words)


def _utc_offset(activity: dict[str, object]) -> float | None:
    local, utc = _real(activity.get("local_timestamp")), _real(activity.get(TIMESTAMP))
    if local is None or utc is None or utc < ABSOLUTE:
        return None
    offset = round((local - utc) / 900.0) * 900.0  # offsets are whole quarters of an hour
    return offset if abs(offset) <= 14 * 3600 and abs(local - utc - offset) <= 120.0 else None


def _ride_of(parts: Sequence[_Gathered], options: ReadOptions) -> Ride:
    tables = [part.records.columns() for part in parts]
    sources = {name: source for part in parts for name, source in part.records.sources.items()}
    sizes = [len(part.records) for part in parts]
    if not any(sizes):
        damage = "; ".join(text for part in parts for text in part.damage)
        raise ReaderError("there are no ride records in this FIT file" + (f": {damage}" if damage else ""))
    names = list(dict.fromkeys(name for table in tables for name in table))
    columns = {
        name: np.concatenate(
            [table.get(name, np.full(size, np.nan)) for table, size in zip(tables, sizes, strict=True)]
        )
        for name in names
    }
    if "distance" in columns:
        _continue_distance(columns["distance"], sizes)
    columns = _joined_records(columns)
    clock = columns.get(TIMESTAMP)
    if clock is None or not np.isfinite(clock).any():
        raise ReaderError("no record of this FIT file has a time")
    channels, notes = channels_of(columns, sources, options.names)
    speed_note = _speed_note(set().union(*(part.sensors for part in parts)))
    if speed_note and "speed" in channels:
        notes.setdefault("speed", speed_note)
    faults = [
        FaultSpan(Fault(FaultKind.FILE_DAMAGED, 0.0, 0.0, "", _damage_cause(part.damage)))
        for part in parts
        if part.damage
    ]
    faults += [_pause_fault(*pause) for part in parts for pause in part.pauses]
    side = one_sided(columns)
    if side:
        notes["power_sides"] = side
        faults.append(FaultSpan(Fault(FaultKind.ONE_SIDED_POWER, 0.0, 0.0, "power", side)))
    offset = next((part.utc_offset for part in parts if part.utc_offset is not None), 0.0)
    absolute = float(np.nanmedian(clock)) >= ABSOLUTE
    return assemble(
        Records(
            clock=clock,
            channels=channels,
            zero=FIT_EPOCH.astimezone(dt.timezone(dt.timedelta(seconds=offset))) if absolute else None,
            laps=[lap for part in parts for lap in _laps(part.laps)],
            faults=faults,
            source="fit",
            device=next((part.device for part in parts if part.device), ""),
            notes=notes,
        ),
        options,
    )


def _damage_cause(clauses: Sequence[str]) -> str:
    text = "; ".join(clauses)
    return f"{text[:1].upper()}{text[1:]}; all that could be read was kept"


def _continue_distance(distance: FloatArray, sizes: Sequence[int]) -> None:
    """Let the distance of chained files go on where the file before left off."""
    begin = sizes[0]
    for size in sizes[1:]:
        before, part = distance[:begin], distance[begin : begin + size]
        known_before, known = before[np.isfinite(before)], part[np.isfinite(part)]
        if known_before.size and known.size and known[0] < known_before[-1]:
            part += known_before[-1] - known[0]
        begin += size


def _joined_records(columns: dict[str, FloatArray]) -> dict[str, FloatArray]:
    """Join neighbouring records of one moment that fill each other's blanks: one record in two messages."""
    clock = columns.get(TIMESTAMP)
    if clock is None or clock.size < 2:
        return columns
    same = np.flatnonzero(clock[1:] == clock[:-1]) + 1
    if not same.size:
        return columns
    others = [values for name, values in columns.items() if name != TIMESTAMP]
    dropped = np.zeros(clock.size, bool)
    for late in same.tolist():
        early = late - 1
        while early > 0 and dropped[early]:
            early -= 1
        if any(np.isfinite(values[late]) and np.isfinite(values[early]) for values in others):
            continue
        for values in others:
            if np.isfinite(values[late]):
                values[early] = values[late]
        dropped[late] = True
    return {name: values[~dropped] for name, values in columns.items()}


def _laps(messages: Sequence[dict[str, object]]) -> Iterator[LapSpan]:
    previous: float | None = None
    for lap in messages:
        start = _real(lap.get("start_time"))
        written = _real(lap.get(TIMESTAMP))
        elapsed = _real(lap.get("total_elapsed_time"))
        if start is None:
            start = previous
        if start is None:
            continue
        end = start + elapsed if elapsed is not None else written
        if end is None:
            continue
        trigger = _TRIGGERS.get(str(lap.get("lap_trigger")), LapTrigger.UNKNOWN)
        yield LapSpan(start, end, trigger)
        previous = end


def _pause_fault(since: float, until: float, automatic: bool) -> FaultSpan:
    how = "Auto-pause stopped" if automatic else "The rider stopped"
    cause = f"{how} the recording for {until - since:.0f} s"
    return FaultSpan(Fault(FaultKind.AUTO_PAUSE, 0.0, 0.0, "", cause), since, until)


def _speed_note(sensors: set[object]) -> str:
    if sensors & _WHEEL_SENSORS:
        return ride_notes.SPEED_FROM_SENSOR
    if sensors - {1, 12, 0} and not sensors & _OTHER_SPEED_SOURCES:
        return ride_notes.NO_SPEED_SENSOR
    return ""
