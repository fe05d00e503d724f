"""The equation of motion: rider and bike along a line in gusty air, integrated as energy.

The state is the total energy of rider and bike: motion of the centre of mass, spin of the wheels, height of
the centre of mass above ground that rises, falls and is leaned over in bends. Its rate is the power at the
wheel less what air, tyres and bearings take; Heun's rule steps it, so the power balance closes to rounding.
Speed follows from the energy. Martin et al. 1998 (J. Appl. Biomech. 14:276-291, from memory) is the source of
the bearing term.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
from numba import njit

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]

GRAVITY = 9.80665  # [m/s^2]

# Columns of the sampled line.
CURVATURE, HEIGHT, NORTHWARD, EASTWARD, GRADE, SHELTER, LIMIT = range(7)

# What the rider is doing.
SETTLE, RUN, EASY, ROLL, STAND, BACK, DONE = range(7)

# Columns of the run table.
CDA, MASS, TYRES = range(3)

SLOWEST = 0.5  # [m/s] below it a foot pushes


@njit(cache=True, nogil=True, inline="always")
def _look_up(samples: FloatArray, position: float, step: float, closed: int, out: FloatArray) -> None:
    x = position / step
    cell = math.floor(x)
    part = x - cell
    n = samples.shape[0]
    if closed:
        i = int(cell) % n
        j = i + 1
        if j == n:
            j = 0
    else:
        i = min(max(int(cell), 0), n - 2)
        j = i + 1
    for k in range(7):
        out[k] = samples[i, k] + part * (samples[j, k] - samples[i, k])


@njit(cache=True, nogil=True, inline="always")
def _lean(speed: float, curvature: float, height: float) -> tuple[float, float, float]:
    """Sine and cosine of the lean, and speed of the centre of mass over wheel speed."""
    pull = speed * speed * curvature / GRAVITY
    if pull < 1e-7:
        return 0.0, 1.0, 1.0
    ratio = 1.0
    sine = 0.0
    cosine = 1.0
    for _ in range(12):
        tangent = pull * ratio
        cosine = 1.0 / math.sqrt(1.0 + tangent * tangent)
        sine = tangent * cosine
        new = 1.0 - height * curvature * sine
        if abs(new - ratio) < 1e-12:
            ratio = new
            break
        ratio = new
    return sine, cosine, ratio


@njit(cache=True, nogil=True, inline="always")
def _energy(speed: float, here: FloatArray, mass: float, spin: float, height: float) -> float:
    _, cosine, ratio = _lean(speed, here[CURVATURE], height)
    body = speed * ratio
    moving = 0.5 * mass * body * body + 0.5 * spin * speed * speed
    return moving + mass * GRAVITY * float(here[HEIGHT] + height * cosine)


@njit(cache=True, nogil=True, inline="always")
def _speed(energy: float, guess: float, here: FloatArray, mass: float, spin: float, height: float) -> float:
    """Speed that holds this energy here; below `SLOWEST` the rider is pushed."""
    speed = max(guess, SLOWEST)
    for _ in range(20):
        error = _energy(speed, here, mass, spin, height) - energy
        move = error / ((mass + spin) * speed)
        speed -= move
        if speed < SLOWEST:
            return SLOWEST
        if abs(move) < 1e-11:
            break
    return speed


@njit(cache=True, nogil=True)
def ride(
    dt: float,
    samples: FloatArray,
    line_step: float,
    closed: int,
    start: float,
    lap: float,
    laps: int,
    turns_back: int,
    gate: float,
    runs: FloatArray,
    targets: FloatArray,
    holds_speed: int,
    wind_east: FloatArray,
    wind_north: FloatArray,
    push: FloatArray,
    wobble: FloatArray,
    drag: FloatArray,
    density: FloatArray,
    crr: FloatArray,
    wander: FloatArray,
    spin: float,
    mass_height: float,
    efficiency: float,
    response: float,
    grade_response: float,
    effort_slope: float,
    effort_reference: float,
    speed_slope: float,
    speed_reference: float,
    yaw_square: float,
    easy_power: float,
    pause: float,
    roll_out: float,
    approach: float,
    easy_time: float,
    settle_time: float,
    warm_up: float,
    position: FloatArray,
    distance: FloatArray,
    power: FloatArray,
    air_along: FloatArray,
    mean_east: FloatArray,
    mean_north: FloatArray,
    braked: FloatArray,
    balance: FloatArray,
    run_of_step: IntArray,
    lap_crossings: FloatArray,
) -> int:
    """Ride the day; fill the arrays after `warm_up` and return the steps used, -1 if they were too few.

    Power, winds and braking are means over a step; position, distance and air speed stand at its end.
    `balance` holds, per step, the energy before, the energy after, and the work of wheel power less losses
    and brakes. `lap_crossings` has shape (runs, laps + 1). [s]
    """
    steps = len(wobble) - 1
    count = runs.shape[0]
    here = np.empty(7)
    there = np.empty(7)
    follow = 1.0 - math.exp(-dt / response)
    leave = math.exp(-dt / 0.15)
    phase = SETTLE
    run = 0
    direction = 1.0
    place = start - (approach if turns_back else 300.0)
    since = 0.0
    if warm_up > 0.0:
        phase = EASY
        if turns_back:
            place -= 8.0 * warm_up
        since = easy_time - warm_up
    line_at = start  # where the next run starts
    ends_at = 0.0
    lap_now = 0
    gone = 0.0
    speed = 3.0
    pedal = 0.5 * easy_power
    trim = 0.0
    mass = runs[0, MASS]
    tyres = int(runs[0, TYRES])
    cda = runs[0, CDA]
    _look_up(samples, place, line_step, closed, here)
    energy = _energy(speed, here, mass, spin, mass_height)
    loss = 0.0
    fresh = 1  # the loss here is not known yet

    for i in range(steps):
        # What the rider does now.
        command = easy_power
        if phase in (SETTLE, RUN):
            target = targets[run, min(lap_now, laps - 1)]
            if holds_speed:
                slip = target - speed
                if abs(slip) < 1.5:
                    trim += 8.0 * slip * dt
                # The rider knows roughly what the speed takes, and trims that by the head unit.
                flat = (0.6 * cda * target * target + 1.1 * runs[run, MASS] * GRAVITY * 0.004) * target
                command = min(max(flat + trim + 120.0 * slip, 0.0), 700.0) * wobble[i]
            else:
                command = target * wobble[i] * (1.0 + grade_response * here[GRADE] * direction)
        stop = 0.0
        if phase in (STAND, DONE):
            command = 0.0
        if phase == ROLL and place >= ends_at + roll_out - speed * speed / 3.0:
            stop = 1.5
        if phase == BACK and place <= line_at - approach + max(speed * speed - 9.0, 0.0) / 3.0:
            stop = 1.5
        if (here[LIMIT] < 90.0 and direction > 0 and speed > 0.98 * here[LIMIT]) or stop > 0.0:
            command = 0.0
        if command > 0.0:
            pedal += follow * (command - pedal)
        else:  # feet stop at once
            pedal = 0.0 if pedal < 1.0 else pedal * leave

        power[i] = pedal
        braked[i] = 0.0
        mean_east[i] = 0.5 * (wind_east[i] + wind_east[i + 1]) * here[SHELTER]
        mean_north[i] = 0.5 * (wind_north[i] + wind_north[i + 1]) * here[SHELTER]
        run_of_step[i] = run if phase == RUN else -1
        before = place
        balance[i, 0] = energy
        if phase == STAND:
            power[i] = 0.0
            pedal = 0.0
            air_along[i] = 0.0
            balance[i, 1] = energy
            balance[i, 2] = 0.0
            since += dt
            if since >= pause:
                phase = BACK
                direction = -1.0
                speed = 1.0
                energy = _energy(speed, here, mass, spin, mass_height)
                fresh = 1
        else:
            area = cda * drag[i] * (1.0 + effort_slope * (pedal - effort_reference) / 100.0)
            wheel = pedal * efficiency
            if fresh:
                loss, _ = _loss(
                    speed, here, direction, wind_east[i], wind_north[i], push[i], area, density[i],
                    crr[tyres, i], mass, mass_height, speed_slope, speed_reference, yaw_square,
                )  # fmt: skip
                fresh = 0
            stretch = 1.0 + here[CURVATURE] * wander[i]
            guess_place = place + direction * dt * speed / stretch
            _look_up(samples, guess_place, line_step, closed, there)
            there[CURVATURE] /= 1.0 + there[CURVATURE] * wander[i + 1]
            guess = _speed(energy + dt * (wheel - loss), speed, there, mass, spin, mass_height)
            new_loss, _ = _loss(
                guess, there, direction, wind_east[i + 1], wind_north[i + 1], push[i + 1], area,
                density[i + 1], crr[tyres, i + 1], mass, mass_height, speed_slope, speed_reference,
                yaw_square,
            )  # fmt: skip
            work = dt * (wheel - 0.5 * (loss + new_loss))
            energy += work
            new_speed = _speed(energy, guess, there, mass, spin, mass_height)
            moved = 0.5 * dt * (speed + new_speed)
            place += direction * moved / stretch
            gone += moved
            _look_up(samples, place, line_step, closed, here)
            here[CURVATURE] /= 1.0 + here[CURVATURE] * wander[i + 1]
            new_speed = _speed(energy, new_speed, here, mass, spin, mass_height)
            if new_speed == SLOWEST:
                energy = _energy(new_speed, here, mass, spin, mass_height)
            limit = 1e9
            if direction > 0 and here[LIMIT] < 90.0:
                limit = here[LIMIT]
            if stop > 0.0:
                limit = min(limit, max(speed - stop * dt, SLOWEST))
            if new_speed > limit:
                new_speed = max(limit, new_speed - 3.0 * dt)
                slower = _energy(new_speed, here, mass, spin, mass_height)
                braked[i] = energy - slower
                work -= braked[i]
                energy = slower
            speed = new_speed
            loss, air_along[i] = _loss(
                speed, here, direction, wind_east[i + 1], wind_north[i + 1], push[i + 1], area,
                density[i + 1], crr[tyres, i + 1], mass, mass_height, speed_slope, speed_reference,
                yaw_square,
            )  # fmt: skip
            balance[i, 1] = energy
            balance[i, 2] = work
        position[i] = place
        distance[i] = gone

        # What comes next.
        now = (i + 1) * dt
        if phase == SETTLE:
            since += dt
            crossed = 0
            if turns_back or gate > 0.0:
                if place >= line_at:
                    crossed = 1
                    now -= dt * (place - line_at) / (place - before)
            elif since >= settle_time and place >= start:
                crossed = 1
                line_at = place
            if crossed:
                phase = RUN
                ends_at = line_at + laps * lap
                lap_crossings[run, 0] = now
                lap_now = 0
        elif phase == RUN:
            border = line_at + (lap_now + 1) * lap
            if place >= border:
                lap_now += 1
                lap_crossings[run, lap_now] = now - dt * (place - border) / (place - before)
                if lap_now == laps:
                    run += 1
                    lap_now = 0
                    since = 0.0
                    phase = ROLL if turns_back else EASY
                    if run == count:
                        phase = DONE
                    line_at = ends_at
        elif phase == ROLL and speed <= SLOWEST:
            phase = STAND
            since = 0.0
        elif phase == BACK and place <= line_at - approach and speed < 3.5:
            direction = 1.0
            phase = SETTLE
            since = 0.0
            fresh = 1
        elif phase == EASY:
            since += dt
            if (place >= line_at - approach) if turns_back else (since >= easy_time):
                phase = SETTLE
                since = 0.0
                if gate > 0.0:  # the first line to come after the rider is up to speed
                    line_at = start + gate * math.ceil((place + settle_time * 9.0 - start) / gate)
        elif phase == DONE:
            since += dt
            if since > 20.0:
                return i + 1
        if phase in (STAND, SETTLE) and since == 0.0 and run < count:
            mass = runs[run, MASS]
            tyres = int(runs[run, TYRES])
            cda = runs[run, CDA]
            trim = 0.0
            energy = _energy(speed, here, mass, spin, mass_height)
            fresh = 1
    return -1


@njit(cache=True, nogil=True, inline="always")
def _loss(
    speed: float,
    here: FloatArray,
    direction: float,
    wind_east: float,
    wind_north: float,
    push: float,
    area: float,
    density: float,
    crr: float,
    mass: float,
    mass_height: float,
    speed_slope: float,
    speed_reference: float,
    yaw_square: float,
) -> tuple[float, float]:
    """Power that air, tyres and bearings take, and the air speed along the bike."""
    _, cosine, ratio = _lean(speed, here[CURVATURE], mass_height)
    body = speed * ratio
    east = here[EASTWARD] * direction
    north = here[NORTHWARD] * direction
    air_east = wind_east * here[SHELTER]
    air_north = wind_north * here[SHELTER]
    along = body - (air_east * east + air_north * north) - push
    across = air_east * north - air_north * east
    whole = math.sqrt(along * along + across * across)
    if speed_slope != 0.0:
        area *= (speed / speed_reference) ** speed_slope
    if yaw_square != 0.0:
        yaw = math.atan2(across, along)
        area *= 1.0 + yaw_square * yaw * yaw
    air = 0.5 * density * area * whole * along * body
    flat = math.sqrt(max(0.0, 1.0 - here[GRADE] * here[GRADE]))
    rolling = crr * mass * GRAVITY * flat / cosine * speed
    bearings = (0.091 + 0.0087 * speed) * speed
    return air + rolling + bearings, along
