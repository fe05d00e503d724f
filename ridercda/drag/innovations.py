"""The innovations of one run: an extended Kalman filter with the gust as a latent process, and its sensitivities.

State at the end of record k: speed now, speed one record ago, and the gust (east, north) then; what drives a record
is the gust's mean over it, with the exact variance of that mean. The
measured power drives the speed; the measurement is the mean speed of the record. The gust is an
Ornstein-Uhlenbeck process about the run's mean wind, so the speed's answer to a gust is part of the model and not
an error in the regressor, and the filter's own gust variance supplies the mean square that gusts add to the drag.

Energy balance of a record, with the mean speed v of its start and end (second order in the record interval):

    m_e (v1 - v0) / dt = P / v - Crr N - m g slope - bearings - 1/2 rho CdA E[V u] q

References
----------
The prediction-error decomposition: F. C. Schweppe, "Evaluation of likelihood functions for Gaussian signals",
IEEE Trans. Inf. Theory 11 (1965) 61-70, doi:10.1109/TIT.1965.1053737. Sensitivities carried along in the filter:
N. K. Gupta and R. K. Mehra, IEEE Trans. Automat. Contr. 19 (1974) 774-783, doi:10.1109/TAC.1974.1100714 (both
cited from memory). Power balance: Martin et al., J. Appl. Biomech. 14 (1998) 276-291.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
from numba import njit

FloatArray = npt.NDArray[np.float64]

# Places of the parameters one run depends on, before the slopes of the venue's nodes.
(
    CDA,
    WIND_EAST,
    WIND_NORTH,
    CRR,
    SPEED_SLOPE,
    POWER_SCALE,
    POWER_OFFSET,
    POWER_DRIFT,
    POWER_LAG,
    TYRE_TEMPERATURE,
    TYRE_WARM_UP,
    SPEED_FACTOR,
    AIR_SPEED_FACTOR,
) = range(13)
LEADING = 13

# Places of the noise parameters.
GUST_SD, GUST_TIME, POWER_NOISE, SPEED_NOISE, AIR_SPEED_NOISE = range(5)
NOISES = 5

BEARING_CONSTANT = 0.091  # [N] Martin et al. 1998 (from memory)
BEARING_SLOPE = 0.0087  # [N s/m] Martin et al. 1998 (from memory)
POWER_NOISE_FLOOR = 60.0  # [W] below it the meter's noise stops shrinking with power (common practice)
START_SPEED_SD = 0.3  # [m/s] what is known of the speed inside a record before the filter has run in

# Columns of the record table handed to the kernel.
(
    DT,
    POWER,
    EXTRA_POWER,
    SPEED,
    AIR_SPEED,
    DENSITY,
    SIN_HEADING,
    COS_HEADING,
    SIGN,
    LOAD,
    PATH_RATIO,
    TEMPERATURE,
    WARM_UP,
    POWER_RATE,
    CLOCK,
    SLOW_POWER,
) = range(16)
COLUMNS = 16

USE, START, SKIP = range(3)


@njit(cache=True, nogil=True)
def _add_up(
    direct: FloatArray, weight: float, e: float, information: FloatArray, gradient: FloatArray
) -> None:
    """Add one innovation's sensitivities to the information (lower triangle) and the gradient."""
    for a in range(direct.size):
        d = direct[a] * weight
        if d == 0.0:
            continue
        gradient[a] += d * e
        row = information[a]
        for b in range(a + 1):
            row[b] += d * direct[b]


@njit(cache=True, nogil=True)
def run_innovations(
    table: FloatArray,  # (n, COLUMNS)
    mark: npt.NDArray[np.int8],  # (n,) USE, START or SKIP
    node: npt.NDArray[np.int64],  # (n, 4) the venue's slope coefficients that act on the record
    share: FloatArray,  # (n, 4) their weights
    leading: FloatArray,  # (LEADING,)
    slopes: FloatArray,  # (m,)
    noise: FloatArray,  # (NOISES,)
    mass: float,
    rotating_mass: float,
    gravity: float,
    efficiency: float,
    reference_speed: float,
    information: FloatArray,  # (LEADING + m,) * 2 out, lower triangle; size 0: not wanted
    gradient: FloatArray,  # (LEADING + m,) out, of half the sum of squares; size 0: not wanted
    innovation: FloatArray,  # (rows,) out, over the standard deviation; rows = n, or 2 n with an air-speed sensor
    variance: FloatArray,  # (rows,) out; 0 = no innovation here, and its row is zero
) -> None:
    """Fill the innovations of one run and their variances; add up what they say of every parameter, if wanted.

    Sensitivities are summed as they arise: a table of them would be larger than all else, and a matrix product
    over it would start threads of its own under the runs' threads.

    Rows 0..n-1 are the wheel speed's, rows n..2n-1 the air-speed sensor's. All in SI; no NaN in, none out, but for
    a NaN air speed, which marks a record without one.
    """
    n = table.shape[0]
    with_air = innovation.shape[0] == 2 * n
    wanted = gradient.shape[0]
    information[:] = 0.0
    gradient[:] = 0.0
    cda = leading[CDA]
    wind_east = leading[WIND_EAST]
    wind_north = leading[WIND_NORTH]
    crr0 = leading[CRR]
    kappa = leading[SPEED_SLOPE]
    factor = 1.0 - leading[SPEED_FACTOR]  # recorded over true
    air_factor = 1.0 + leading[AIR_SPEED_FACTOR]
    gust_variance = noise[GUST_SD] ** 2
    speed_noise = noise[SPEED_NOISE] ** 2
    air_noise = noise[AIR_SPEED_NOISE] ** 2

    s_v = np.zeros(wanted)
    s_p = np.zeros(wanted)
    s_e = np.zeros(wanted)
    s_n = np.zeros(wanted)
    drive = np.zeros(LEADING)
    direct = np.zeros(wanted)
    v = 0.0
    gust_e = 0.0
    gust_n = 0.0
    p = np.zeros((4, 4))  # order: speed, speed a record ago, gust east, gust north
    c = np.zeros(4)
    gain = np.zeros(4)
    running = False

    for k in range(n):
        variance[k] = 0.0
        innovation[k] = 0.0
        if with_air:
            variance[n + k] = 0.0
            innovation[n + k] = 0.0
        if mark[k] == SKIP:
            running = False
            continue
        dt = table[k, DT]
        y = table[k, SPEED]
        if mark[k] == START or not running:
            running = True
            v = y / factor
            gust_e = 0.0
            gust_n = 0.0
            p[:] = 0.0
            p[0, 0] = START_SPEED_SD**2 + speed_noise
            p[1, 1] = p[0, 0]
            p[2, 2] = gust_variance
            p[3, 3] = gust_variance
            for j in range(wanted):
                s_v[j] = 0.0
                s_p[j] = 0.0
                s_e[j] = 0.0
                s_n[j] = 0.0
            if wanted > 0:
                s_v[SPEED_FACTOR] = v / factor
            continue

        # The gust moves on: to its mean over the record, which acts, and to its end. Taking the end for the mean
        # would make it change a third too much from record to record and so overstate its strength.
        fade = math.exp(-dt / noise[GUST_TIME])
        halfway = 0.5 * (1.0 + fade)
        fresh = gust_variance * (1.0 - fade * fade)
        acts_e = gust_e * halfway
        acts_n = gust_n * halfway
        gust_e *= fade
        gust_n *= fade
        m_ee = p[2, 2] * halfway * halfway + fresh / 3.0
        m_nn = p[3, 3] * halfway * halfway + fresh / 3.0
        m_en = p[2, 3] * halfway * halfway
        x_ee = p[2, 2] * halfway * fade + 0.5 * fresh  # mean with end
        x_nn = p[3, 3] * halfway * fade + 0.5 * fresh
        x_en = p[2, 3] * halfway * fade
        c_vme = p[0, 2] * halfway
        c_vmn = p[0, 3] * halfway
        g_ee = p[2, 2] * fade * fade + fresh
        g_nn = p[3, 3] * fade * fade + fresh
        g_en = p[2, 3] * fade * fade
        c_ve = p[0, 2] * fade
        c_vn = p[0, 3] * fade
        # The mean square over the record is of the gust itself, not of its mean.
        s_ee = 0.5 * (p[2, 2] + g_ee)
        s_nn = 0.5 * (p[3, 3] + g_nn)
        s_en = 0.5 * (p[2, 3] + g_en)

        # Forces at the middle of the record.
        sin_h = table[k, SIN_HEADING]
        cos_h = table[k, COS_HEADING]
        rho = table[k, DENSITY]
        q = table[k, PATH_RATIO]
        east = wind_east + acts_e
        north = wind_north + acts_n
        head = east * sin_h + north * cos_h
        cross = east * cos_h - north * sin_h
        var_head = sin_h * sin_h * s_ee + cos_h * cos_h * s_nn + 2.0 * sin_h * cos_h * s_en
        var_cross = cos_h * cos_h * s_ee + sin_h * sin_h * s_nn - 2.0 * sin_h * cos_h * s_en
        measured = table[k, POWER]
        # The scale error acts on the run's mean power: record by record the meter's noise shrinks the speed's
        # answer to its own readings, which would pass for a scale error that is not there.
        power = measured - leading[POWER_SCALE] * table[k, SLOW_POWER]
        power += table[k, POWER_RATE] * leading[POWER_LAG]
        power -= leading[POWER_OFFSET] + leading[POWER_DRIFT] * table[k, CLOCK]
        gain_power = efficiency if power > 0.0 else 1.0
        power = power * gain_power + table[k, EXTRA_POWER]
        inertia = mass * q * q + rotating_mass
        weight = mass * gravity
        softness = (
            leading[TYRE_TEMPERATURE] * table[k, TEMPERATURE] + leading[TYRE_WARM_UP] * table[k, WARM_UP]
        )
        crr = crr0 * (1.0 + softness)
        sign = table[k, SIGN]
        slope = 0.0
        for i in range(4):
            slope += sign * share[k, i] * slopes[node[k, i]]
        resist = crr * weight * table[k, LOAD] + slope * weight + BEARING_CONSTANT

        v0 = v
        middle = v0
        square = 0.0
        u = 0.0
        speed = 0.0
        for _ in range(3):  # the implicit midpoint, by fixed point: each pass gains two digits
            if middle < 1.0:
                middle = 1.0
            u = q * middle + head
            speed = math.sqrt(u * u + cross * cross)
            if speed < 0.1:
                speed = 0.1
            ratio = u / speed
            ratio3 = ratio * ratio * ratio
            square = speed * u + 0.5 * ((3.0 * ratio - ratio3) * var_head + ratio3 * var_cross)
            shape = 1.0 - kappa * (middle - reference_speed) / reference_speed
            drag = 0.5 * rho * cda * shape * square * q
            push = power / middle - resist - BEARING_SLOPE * middle - drag
            middle = v0 + 0.5 * dt * push / inertia
        v1 = 2.0 * middle - v0

        # First derivatives of the record's acceleration.
        along_u = speed + u * u / speed
        along_c = u * cross / speed
        half = 0.5 * rho * cda * q
        a_v = (
            -power / (middle * middle)
            - BEARING_SLOPE
            - half * (shape * along_u * q - kappa / reference_speed * square)
        ) / inertia
        solve = 1.0 / (1.0 - 0.5 * dt * a_v)
        a_east = -half * shape * (along_u * sin_h + along_c * cos_h) / inertia
        a_north = -half * shape * (along_u * cos_h - along_c * sin_h) / inertia
        t_v = (1.0 + 0.5 * dt * a_v) * solve
        t_e = dt * a_east * solve
        t_n = dt * a_north * solve
        spread = noise[POWER_NOISE] * math.sqrt(measured * measured + POWER_NOISE_FLOOR * POWER_NOISE_FLOOR)
        shake = dt * solve * efficiency * spread / (middle * inertia)

        # Covariance: speed now from speed before and the gust of this record.
        vv = (
            t_v * t_v * p[0, 0]
            + t_e * t_e * m_ee
            + t_n * t_n * m_nn
            + 2.0 * (t_v * t_e * c_vme + t_v * t_n * c_vmn + t_e * t_n * m_en)
            + shake * shake
        )
        vp = t_v * p[0, 0] + t_e * c_vme + t_n * c_vmn
        ve = t_v * c_ve + t_e * x_ee + t_n * x_en
        vn = t_v * c_vn + t_e * x_en + t_n * x_nn
        pp = p[0, 0]
        p[0, 0] = vv
        p[0, 1] = vp
        p[1, 0] = vp
        p[1, 1] = pp
        p[0, 2] = ve
        p[2, 0] = ve
        p[0, 3] = vn
        p[3, 0] = vn
        p[1, 2] = c_ve
        p[2, 1] = c_ve
        p[1, 3] = c_vn
        p[3, 1] = c_vn
        p[2, 2] = g_ee
        p[3, 3] = g_nn
        p[2, 3] = g_en
        p[3, 2] = g_en

        if wanted > 0:
            gain_theta = dt * solve / inertia
            drive[CDA] = -0.5 * rho * shape * square * q * gain_theta
            drive[WIND_EAST] = t_e
            drive[WIND_NORTH] = t_n
            drive[CRR] = -(1.0 + softness) * weight * table[k, LOAD] * gain_theta
            drive[SPEED_SLOPE] = half * square * (middle - reference_speed) / reference_speed * gain_theta
            by_power = gain_power / middle * gain_theta
            drive[POWER_SCALE] = -table[k, SLOW_POWER] * by_power
            drive[POWER_OFFSET] = -by_power
            drive[POWER_DRIFT] = -table[k, CLOCK] * by_power
            drive[POWER_LAG] = table[k, POWER_RATE] * by_power
            drive[TYRE_TEMPERATURE] = -crr0 * table[k, TEMPERATURE] * weight * table[k, LOAD] * gain_theta
            drive[TYRE_WARM_UP] = -crr0 * table[k, WARM_UP] * weight * table[k, LOAD] * gain_theta
            by_slope = -weight * sign * gain_theta
            for j in range(wanted):
                before = s_v[j]
                s_p[j] = before
                s_v[j] = t_v * before + halfway * (t_e * s_e[j] + t_n * s_n[j])
                s_e[j] *= fade
                s_n[j] *= fade
            for j in range(LEADING):
                s_v[j] += drive[j]
            for i in range(4):
                s_v[LEADING + node[k, i]] += by_slope * share[k, i]
        v_before = v0
        v = v1

        # Wheel speed: the mean over the record.
        h = 0.5 * factor
        for i in range(4):
            c[i] = h * (p[i, 0] + p[i, 1])
        var = h * (c[0] + c[1]) + speed_noise
        e = y - h * (v + v_before)
        scale = 1.0 / math.sqrt(var)
        innovation[k] = e * scale
        variance[k] = var
        for i in range(4):
            gain[i] = c[i] / var
        if wanted > 0:
            for j in range(wanted):
                direct[j] = -h * (s_v[j] + s_p[j])
            direct[SPEED_FACTOR] += 0.5 * (v + v_before)
            _add_up(direct, 1.0 / var, e, information, gradient)
            for j in range(wanted):
                d = direct[j]
                s_v[j] += gain[0] * d
                s_p[j] += gain[1] * d
                s_e[j] += gain[2] * d
                s_n[j] += gain[3] * d
        v += gain[0] * e
        v_before += gain[1] * e
        gust_e += gain[2] * e
        gust_n += gain[3] * e
        for i in range(4):
            for j in range(4):
                p[i, j] -= gain[i] * c[j]

        air = table[k, AIR_SPEED]
        if with_air and air == air:  # NaN: no sensor in this record
            h0 = 0.5 * q * air_factor
            h2 = sin_h * air_factor
            h3 = cos_h * air_factor
            for i in range(4):
                c[i] = h0 * (p[i, 0] + p[i, 1]) + h2 * p[i, 2] + h3 * p[i, 3]
            var = h0 * (c[0] + c[1]) + h2 * c[2] + h3 * c[3] + air_noise
            met = 0.5 * q * (v + v_before) + (wind_east + gust_e) * sin_h + (wind_north + gust_n) * cos_h
            e = air - air_factor * met
            scale = 1.0 / math.sqrt(var)
            innovation[n + k] = e * scale
            variance[n + k] = var
            for i in range(4):
                gain[i] = c[i] / var
            if wanted > 0:
                for j in range(wanted):
                    direct[j] = -h0 * (s_v[j] + s_p[j]) - h2 * s_e[j] - h3 * s_n[j]
                direct[WIND_EAST] -= h2
                direct[WIND_NORTH] -= h3
                direct[AIR_SPEED_FACTOR] -= met
                _add_up(direct, 1.0 / var, e, information, gradient)
                for j in range(wanted):
                    d = direct[j]
                    s_v[j] += gain[0] * d
                    s_p[j] += gain[1] * d
                    s_e[j] += gain[2] * d
                    s_n[j] += gain[3] * d
            v += gain[0] * e
            gust_e += gain[2] * e
            gust_n += gain[3] * e
            for i in range(4):
                for j in range(4):
                    p[i, j] -= gain[i] * c[j]
