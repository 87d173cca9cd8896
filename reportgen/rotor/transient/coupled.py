"""The one-mass rotor driven by a torque: whirl and speed in one set of equations.

The disc's shaft centre is at z, its mass centre at z_G = z + e·e^{iθ}; the shaft ends, on their
support, at y; the shaft is bowed by b, which turns with it. With J the moment of inertia of all
that turns, about the mass centre, kinetic and elastic energy are

    T = ½m|ż_G|² + ½m_s|ẏ|² + ½Jθ̇²,    V = ½k|w|² + ½k_s|y|²,    w = z − y − b·e^{iθ},

and half the dissipated power is D = ½c|ż|² + ½c_s|ẏ|² + ½c_i|u|², u = (ż − ẏ) − iθ̇(z − y).
Lagrange's equations in z, y and θ, with drive torque T_d and load torque T_l, are

    m z̈_G = −F,   F = k w + c_i u + c ż,
    m_s ÿ = k w + c_i u − k_s y − c_s ẏ,
    J θ̈ = T_d(θ̇) − T_l(θ̇) + Im{e F e^{−iθ}} + k Im{w b̄ e^{−iθ}} + c_i Im{u (z̄ − ȳ)}.

At constant speed the torque drawn is (c|ż|² + c_s|ẏ|²)/θ̇ on the average: the drive pays for what
the whirl dissipates. They are integrated in the frame that turns with the shaft, p = z·e^{−iθ},
where a run-up is slow, and where no term holds θ any more. The weight is left out: in a turn it
does no work on the average.

References
----------
Sommerfeld, A. (1902), Zeitschrift des Vereines deutscher Ingenieure 46, 391-394 (the drive stalls
at the resonance); Kononenko, V. O. (1969), Vibrating Systems with a Limited Power Supply, Iliffe
(the coupled equations and their steady states).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reportgen.errors import ModelError
from reportgen.rotor import onemass_checks as check
from reportgen.rotor.onemass_model import OneMassRotor

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Torque = Callable[[float], float]

SPEED, ANGLE, DRIVE, LOAD, LOST = range(-5, 0)
"""Places in the state, after the motions of disc and shaft ends: θ̇, θ, works and dissipation."""


@dataclass(frozen=True)
class EnergyAudit:
    """Where the energy of a run went [J].

    Parameters
    ----------
    drive
        Work done by the drive.
    load
        Work taken by load and drag.
    dissipated
        Taken by the damping of shaft, disc and supports.
    stored_start, stored_end
        Kinetic and elastic energy at the start and at the end.
    """

    drive: float
    load: float
    dissipated: float
    stored_start: float
    stored_end: float

    @property
    def residual(self) -> float:
        """Input less stored, dissipated and load [J]; what the integration lost or made."""
        return self.drive - (self.stored_end - self.stored_start) - self.dissipated - self.load

    @property
    def mismatch(self) -> float:
        """Residual over the largest energy in the audit [-]."""
        parts = (self.drive, self.load, self.dissipated, self.stored_start, self.stored_end)
        size = max(abs(part) for part in parts)
        return abs(self.residual) / size if size > 0.0 else abs(self.residual)


class CoupledRotor:
    """Equations of motion of a rotor and its speed, in the turning frame.

    The complex state is (p, v[, q[, r]], θ̇, θ, W_d, W_l, W_c): displacement and velocity of the
    disc and of the shaft ends times e^{−iθ}, speed, angle, works of drive and load, dissipation.

    Parameters
    ----------
    rotor
        The rotor, on rigid or flexible supports, with internal damping and bow if it has any.
    inertia
        Moment of inertia of all that turns [kg·m²], about the axis, greater than 0.

    Raises
    ------
    ModelError
        If the inertia is not positive.
    """

    def __init__(self, rotor: OneMassRotor, inertia: float) -> None:
        self.rotor = rotor
        self.inertia = check.positive("moment of inertia", inertia, "kg·m²")
        self.damping, self.bow = rotor.damping, rotor.bow_vector
        own = rotor.support
        self.stiffness = rotor.stiffness
        self.support_mass = self.support_stiffness = self.support_damping = 0.0
        self.motions = 2
        if own is None:
            return
        if own.mass == 0.0 and own.damping + rotor.internal_damping == 0.0:
            self.stiffness = rotor.stiffness * own.stiffness / (rotor.stiffness + own.stiffness)
            return
        self.support_stiffness, self.support_damping = own.stiffness, own.damping
        self.support_mass = own.mass
        self.motions = 4 if own.mass > 0.0 else 3

    def start(self, speed: float, angle: float = 0.0) -> Complexes:
        """State of steady whirl at a speed [rad/s] and angle [rad]."""
        motion = steady_motion(self, np.asarray([speed]))[:, 0]
        return np.concatenate([motion, [speed, angle, 0.0, 0.0, 0.0]]).astype(np.complex128)

    def fastest_rate(self, speed: float) -> float:
        """Bound the fastest exponent in the turning frame [1/s], up to a speed [rad/s]."""
        rotor = self.rotor
        rate = rotor.natural_frequency * (1.0 + 2.0 * rotor.damping_ratio) + speed
        loss = self.support_damping + rotor.internal_damping
        both = self.stiffness + self.support_stiffness
        if self.motions == 3:
            return rate + both / loss
        if self.motions == 4:
            return rate + math.sqrt(both / self.support_mass) + loss / self.support_mass
        return rate

    def scale(self) -> Floats:
        """Size of each part of the state, for tolerances."""
        rotor = self.rotor
        size = max(rotor.eccentricity, rotor.bow, 1e-12)
        w = rotor.natural_frequency
        energy = 0.5 * self.inertia * w**2
        motion = [size, size * w, size, size * w][: self.motions]
        return np.array([*motion, w, 1.0, energy, energy, energy])

    def rates(self, drive: Torque, load: Torque) -> Callable[[float, Complexes], Complexes]:
        """Give the right-hand side, for functions of drive and load torque against speed."""
        rotor, J = self.rotor, self.inertia
        m, k, c, b = rotor.mass, self.stiffness, self.damping, self.bow
        inner, e, motions = rotor.internal_damping, rotor.eccentricity, self.motions
        ms, ks, cs = self.support_mass, self.support_stiffness, self.support_damping
        back = b.conjugate()

        def rates(_: float, state: Complexes) -> Complexes:
            values = state.tolist()
            p, v, w = values[0], values[1], values[SPEED].real
            turn = 1j * w
            q = r = q_rate = r_rate = 0j
            if motions > 2:
                q = values[2]
                if motions == 4:
                    r = values[3]
                else:
                    spring = k * (p - q - b) + inner * (v - turn * (p - q))
                    r = (spring - ks * q) / (cs + inner)
            bent = p - q - b
            slip = v - r - turn * (p - q)
            shaft = k * bent + inner * slip
            force = shaft + c * v
            took, gave = load(w), drive(w)
            drawn = e * force.imag + k * (bent * back).imag
            if inner:
                drawn += inner * (slip * (p - q).conjugate()).imag
            spin = (gave - took + drawn) / J
            v_rate = -force / m - e * (1j * spin - w * w) - turn * v
            lost = c * abs(v) ** 2 + cs * abs(r) ** 2 + inner * abs(slip) ** 2
            out = [v - turn * p, v_rate, spin, w, gave * w, took * w, lost]
            if motions > 2:
                q_rate = r - turn * q
                out.insert(2, q_rate)
            if motions == 4:
                r_rate = (shaft - ks * q - cs * r) / ms - turn * r
                out.insert(3, r_rate)
            return np.array(out, dtype=np.complex128)

        return rates

    def stored(self, state: Complexes) -> float:
        """Kinetic and elastic energy of a state [J]."""
        rotor = self.rotor
        p, v, w = complex(state[0]), complex(state[1]), float(state[SPEED].real)
        q = complex(state[2]) if self.motions > 2 else 0j
        r = complex(state[3]) if self.motions > 3 else 0j
        moving = rotor.mass * abs(v + 1j * w * rotor.eccentricity) ** 2
        moving += self.support_mass * abs(r) ** 2 + self.inertia * w**2
        bent = self.stiffness * abs(p - q - self.bow) ** 2
        return 0.5 * (moving + bent + self.support_stiffness * abs(q) ** 2)

    def audit(self, first: Complexes, last: Complexes) -> EnergyAudit:
        """Audit of a run between two states."""
        spent = (last - first).real
        return EnergyAudit(
            float(spent[DRIVE]),
            float(spent[LOAD]),
            float(spent[LOST]),
            self.stored(first),
            self.stored(last),
        )


def steady_motion(coupled: CoupledRotor, speeds: Floats) -> Complexes:
    """Motions (p, v[, q[, r]]) of the steady whirl at speeds [rad/s], shape (motions, n).

    Raises
    ------
    ModelError
        If a speed is an undamped critical.
    """
    rotor, w = coupled.rotor, np.asarray(speeds, dtype=np.float64)
    # The turning shaft's own damping makes no force in a whirl at its own speed.
    k, m, ms = coupled.stiffness, rotor.mass, coupled.support_mass
    disc: Complexes = k - m * w**2 + 1j * coupled.damping * w
    load = m * rotor.eccentricity * w**2 + k * coupled.bow
    if coupled.motions == 2:
        if np.any(np.abs(disc) < 1e-12 * k):
            raise ModelError("there is no steady whirl at an undamped critical speed")
        p = load / disc
        return np.asarray([p, 1j * w * p])
    ends = k + coupled.support_stiffness - ms * w**2 + 1j * coupled.support_damping * w
    # disc·p − k·q = load, −k·p + ends·q = −k·b.
    whole = disc * ends - k * k
    if np.any(np.abs(whole) < 1e-12 * np.abs(disc * ends)):
        raise ModelError("there is no steady whirl at an undamped critical speed")
    p = (load * ends - k * k * coupled.bow) / whole
    q = (k * p - k * coupled.bow) / ends
    motion = [p, 1j * w * p, q, 1j * w * q]
    return np.asarray(motion[: coupled.motions])


def whirl_torque(coupled: CoupledRotor, speeds: Floats) -> Floats:
    """Torque drawn by the steady whirl at speeds [N·m]: its dissipation over the speed.

    (c|ż|² + c_s|ẏ|²)/Ω = Ω(c|z|² + c_s|y|²); the damping of the turning shaft has no part in it.
    """
    w = np.asarray(speeds, dtype=np.float64)
    shape = w.shape
    motion = steady_motion(coupled, w.ravel())
    torque: Floats = np.asarray(coupled.damping * np.abs(motion[0]) ** 2, dtype=np.float64)
    if coupled.motions > 2:
        torque = torque + coupled.support_damping * np.abs(motion[2]) ** 2
    return np.asarray(w.ravel() * torque).reshape(shape)
