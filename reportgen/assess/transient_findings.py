"""The results of passages as findings, each with its second computation."""

from __future__ import annotations

from typing import TYPE_CHECKING

from reportgen.assess.model import Finding, SecondComputation

if TYPE_CHECKING:
    from reportgen.assess.transient_model import SuddenRun, TransientRun, Watched


def run_findings(run: TransientRun) -> tuple[Finding, ...]:
    """Return what one passage adds to the results."""
    highest = run.highest
    return (
        *(f for place in run.watched for f in _peak(run, place, headline=place is highest)),
        *(f for place in run.watched for f in _above(run, place, headline=place is highest)),
        *_forces(run),
        *_hang(run),
        *_drive(run),
        *_energy(run),
        *_least(run),
    )


def _at(place: Watched) -> str:
    return f" at {place.name}" if place.name else ""


def _id(run: TransientRun, place: Watched, what: str) -> str:
    return "-".join(part for part in (run.id, place.id, what) if part)


def _peak(run: TransientRun, place: Watched, *, headline: bool) -> tuple[Finding, ...]:
    """Return the peak of a passage, or that there is none and what is the largest amplitude."""
    where = f"{run.id}-result"
    largest = Finding(
        id=_id(run, place, "peak" if run.crossed else "largest"),
        title=f"{run.name}: largest amplitude{_at(place)}"
        + ("" if run.crossed else ", not of a passage"),
        symbol=r"|z|_{\max}",
        value=place.peak,
        quantity="displacement",
        measure="0-peak",
        method=place.method,
        where=where,
        headline=headline,
        second=place.second,
    )
    speed = Finding(
        id=_id(run, place, "peak-speed" if run.crossed else "largest-speed"),
        title=f"{run.name}: speed at the largest amplitude{_at(place)}",
        symbol=r"\Omega_{\max}",
        value=place.peak_speed,
        quantity="speed",
        method=place.method,
        where=where,
        headline=False,
    )
    if run.crossed:
        return largest, speed
    absent = Finding(
        id=_id(run, place, "peak"),
        title=f"{run.name}: peak of the passage{_at(place)}",
        symbol=r"|z|_{\max}",
        value=None,
        quantity="displacement",
        measure="0-peak",
        method="not available",
        where=where,
        note=run.reason,
        headline=headline,
    )
    return absent, largest, speed


def _above(run: TransientRun, place: Watched, *, headline: bool) -> tuple[Finding, ...]:
    if place.above is None:
        return ()
    return (
        Finding(
            id=_id(run, place, "time-above"),
            title=f"{run.name}: time above the limit of amplitude{_at(place)}",
            symbol="t_>",
            value=place.above,
            quantity="time",
            method="instants at which the amplitude meets the limit",
            where=f"{run.id}-result",
            headline=headline and place.above_second is not None,
            second=place.above_second,
        ),
    )


def _forces(run: TransientRun) -> tuple[Finding, ...]:
    if not run.forces:
        return ()
    largest = max(run.forces, key=lambda force: force.value)
    return tuple(
        Finding(
            id="-".join(part for part in (run.id, force.id, "force") if part),
            title=f"{run.name}: largest rotating force, {force.name}",
            symbol="F",
            value=force.value,
            quantity="force",
            measure="0-peak",
            method="motion times stiffness and damping of the path"
            if force.second
            else "motion of the record",
            where="forces",
            headline=force is largest and force.second is not None,
            second=force.second,
        )
        for force in run.forces
    )


def _hang(run: TransientRun) -> tuple[Finding, ...]:
    if run.hang_speed is None:
        return ()
    state = run.hang_state
    return (
        Finding(
            id=f"{run.id}-hang-speed",
            title=f"{run.name}: speed at which the rotor hangs",
            symbol=r"\Omega_h",
            value=run.hang_speed,
            quantity="speed",
            method="coupled equations of whirl and speed, integrated",
            where=f"{run.id}-result",
            second=None
            if state is None
            else SecondComputation(
                "balance of drive, load and steady whirl, without integration",
                state.speed,
                1e-4,
                "the speed settles to 1e-6 in a window",
            ),
        ),
    )


def _drive(run: TransientRun) -> tuple[Finding, ...]:
    margin = None if run.drive is None else run.drive.margin
    if run.drive is None or margin is None:
        return ()
    return (
        Finding(
            id=f"{run.id}-least-torque",
            title=f"{run.name}: least share of the drive torque that passes the critical speed",
            symbol=r"\lambda_{\min}",
            value=margin.least_factor,
            quantity="ratio",
            method="runs bracketed between stall and passage",
            where=f"{run.id}-margin",
            second=run.drive.least_second,
        ),
        Finding(
            id=f"{run.id}-drive-margin",
            title=f"{run.name}: drive torque above the least that passes",
            symbol=r"1/\lambda_{\min} - 1",
            value=margin.margin,
            quantity="percent",
            method="from the least share",
            where=f"{run.id}-margin",
            headline=False,
        ),
    )


def _energy(run: TransientRun) -> tuple[Finding, ...]:
    audit = run.audit
    if audit is None or audit.dissipated <= 0.0:
        return ()
    second = None
    if run.dissipated_second is None and run.watched[0].id:
        second = SecondComputation(
            "work of drive less load and what is stored",
            audit.drive - audit.load - (audit.stored_end - audit.stored_start),
            1e-2 + 1e-6 * max(audit.drive, audit.stored_start) / audit.dissipated,
            "a difference of large energies, good to 10⁻⁶ of the largest",
        )
    if run.dissipated_second is not None:
        second = SecondComputation(
            "sum of damping times velocity squared over the other equations' record",
            run.dissipated_second,
            1e-4,
            "48 samples a turn; integrated at 1e-8 a step",
        )
    return (
        Finding(
            id=f"{run.id}-dissipated",
            title=f"{run.name}: energy taken by the whirl's damping",
            symbol="W_c",
            value=audit.dissipated,
            quantity="energy",
            method="integrated with the motion",
            where="energy",
            headline=False,
            second=second,
        ),
    )


def _least(run: TransientRun) -> tuple[Finding, ...]:
    found = None if run.map is None else run.map.least
    if found is None or not found.acceleration:
        return ()
    return (
        Finding(
            id=f"{run.id}-least-acceleration",
            title=f"{run.name}: least acceleration that keeps within the closest clearance",
            symbol=r"\dot{\Omega}_{\min}",
            value=abs(found.acceleration),
            quantity="acceleration_speed",
            method="root of the exact peak over acceleration",
            where=f"{run.id}-map",
            headline=False,
        ),
    )


def sudden_findings(sudden: SuddenRun | None) -> tuple[Finding, ...]:
    """Return what a sudden unbalance adds to the results."""
    if sudden is None:
        return ()
    force = () if sudden.force is None else (sudden.force,)
    return (
        Finding(
            id="sudden-peak",
            title=f"{sudden.name}: largest amplitude",
            symbol=r"|z|_{\max}",
            value=sudden.peak,
            quantity="displacement",
            measure="0-peak",
            method=sudden.method,
            where="sudden-result",
            second=sudden.second,
        ),
        *(
            Finding(
                id="sudden-force",
                title=f"{sudden.name}: largest rotating force, {one.name}",
                symbol="F",
                value=one.value,
                quantity="force",
                measure="0-peak",
                method="motion times stiffness and damping of the path",
                where="sudden-result",
                headline=False,
                second=one.second,
            )
            for one in force
        ),
    )
