"""What the template of a tolerance study shows, part by part."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet.blocks import Inline
from reportgen.study.inputs import Varied
from reportgen.study.sampling import WIDTH
from reportgen.study.show_margins import BINS, cumulative, histogram, varies
from reportgen.study.stations import SPEEDS
from reportgen.study.study import worst_settings

if TYPE_CHECKING:
    from reportgen.sheet.sheet import Sheet
    from reportgen.study.study import Share, Study

_METHODS = {
    "sobol": "scrambled Sobol' points",
    "latin hypercube": "a Latin hypercube",
    "random": "independent random points",
}
_INTERVALS = {"clopper-pearson": "Clopper and Pearson", "wilson": "Wilson"}


def studied(sheet: Sheet, study: Study) -> None:
    """Show the calculation that is studied, with its criteria as it stands."""
    of = sheet.case.of
    document = of.case.document
    sheet.paragraph(
        f"Studied is {document.number} revision {document.revision}, {document.title}, by its "
        f"case file {of.file}. The table gives its criteria with every input at its stated value."
    )
    sheet.table(
        "nominal",
        "The calculation as it stands, without tolerances",
        [
            {"title": "Criterion", "width": 0.4},
            {"title": "Value", "align": "right"},
            {"title": "Limit", "align": "right"},
            {"title": "Margin", "align": "right"},
            {"title": "Verdict"},
        ],
        [
            [
                f"C{number} {j.outcome.title}",
                sheet.show(j.outcome.value, j.outcome.quantity),
                "–"
                if j.outcome.limit is None
                else f"{j.outcome.sense} {sheet.show(j.outcome.limit, j.outcome.quantity)}",
                sheet.show(j.outcome.margin, "percent", 3),
                j.outcome.verdict,
            ]
            for number, j in enumerate(study.nominal, 1)
        ],
    )


def inputs(sheet: Sheet, study: Study) -> None:
    """Show what varies, how far, and by which distribution."""
    sheet.table(
        "varied",
        "What varies",
        [
            {"title": "Input", "width": 0.28},
            {"title": "As stated", "align": "right"},
            {"title": "Tolerance", "align": "right"},
            {"title": "From", "align": "right"},
            {"title": "To", "align": "right"},
            {"title": "Distribution"},
        ],
        [
            [
                v.title,
                v.given["as_given"],
                f"± {v.given['tolerance']['as_given']}",
                sheet.show(v.value - v.half_width, v.quantity),
                sheet.show(v.value + v.half_width, v.quantity),
                v.distribution,
            ]
            for v in study.varied
        ],
        note=_distributions(study.varied),
    )
    still = [
        title
        for _, title, given, _ in sheet.case.givens()
        if not given.half_width or given.distribution == "none"
    ]
    if still:
        sheet.paragraph("Without a tolerance, and so held at their values: ", "; ".join(still), ".")


def _distributions(varied: tuple[Varied, ...]) -> str:
    kinds = {v.distribution for v in varied}
    words = []
    if "uniform" in kinds:
        words.append("uniform: every value within the tolerance alike")
    if "normal" in kinds:
        words.append(
            f"normal: standard deviation 1/{WIDTH:g} of the tolerance, cut at its ends, since a "
            "part outside its tolerance is not built in"
        )
    return f"{'; '.join(words)}. All inputs are independent."


def sampling(sheet: Sheet, study: Study) -> None:
    """Show how the samples are drawn, with the seed that gives the same ones again."""
    plan = sheet.case.sampling
    how = "by closed forms on arrays" if study.model.at_once else "one by one"
    sheet.table(
        "sampling",
        "How rotors are drawn",
        [{"title": "", "width": 0.36}, {"title": "Value"}],
        [
            ["Points", _METHODS[plan.method]],
            ["Two samples A and B of", f"{study.samples} rotors each"],
            ["Rotors counted for the shares", f"{2 * study.samples} (A and B)"],
            ["Rotors computed in all", f"{study.evaluations}, {how}"],
            ["Seed", f"{plan.seed} (numpy, PCG64)"],
            [
                "Confidence intervals",
                f"{100 * study.confidence:.4g} %, {_INTERVALS[plan.interval]}",
            ],
        ],
    )
    if sheet.case.of.case.template == "lateral-review":
        sheet.paragraph(
            f"Each rotor is judged by its whirl at the probes (at the bearings where there are "
            f"none) at {SPEEDS} even speeds, by the peaks of that response and by its damped "
            "modes at the maximum continuous speed. Limits on bearing load, shaft stress, balance "
            "and a project's own results are not judged in a study."
        )
    if plan.method != "random":
        sheet.paragraph(
            "The interval is that of independent samples. Points that fill the tolerances evenly "
            "scatter less in nearly all cases, so that it is wider than it need be (common "
            "practice)."
        )


def shares(sheet: Sheet, study: Study) -> None:
    """Show how many rotors fail each criterion, with the confidence interval."""
    rows: list[list[Inline]] = []
    for number, share in enumerate((*study.shares, study.any_share), 1):
        last = share is study.any_share
        name = "any criterion" if last else f"C{number} {share.title}"
        rows.append(
            [
                {"strong": name} if last else name,
                str(share.failing),
                str(share.assessed),
                sheet.show(share.value, "percent", 3),
                _ends(sheet, share),
            ]
        )
    opened = max((share.open for share in study.shares), default=0)
    sheet.table(
        "shares",
        "Share of rotors that fail",
        [
            {"title": "Criterion", "width": 0.42},
            {"title": "Fail", "align": "right"},
            {"title": "Of", "align": "right"},
            {"title": "Share", "align": "right"},
            {"title": "Interval", "align": "right"},
        ],
        rows,
        note=f"Up to {opened} rotors could not be assessed and are counted neither way."
        if opened
        else "Every rotor could be assessed.",
    )


def _ends(sheet: Sheet, share: Share) -> str:
    if share.interval is None:
        return "–"
    low, high = (sheet.show(end, "percent", 3) for end in share.interval)
    return f"{low} to {high}"


def margins(sheet: Sheet, study: Study) -> None:
    """Show how the margins are spread: quantiles, and a histogram of each that varies."""
    rows: list[list[Inline]] = []
    for number, row in enumerate(study.outcomes.margin):
        known = row[~np.isnan(row)]
        if not known.size:
            continue
        least, low, middle, high = np.quantile(known, (0.0, 0.05, 0.5, 0.95))
        rows.append(
            [f"C{number + 1} {study.titles[number]}"]
            + [sheet.show(float(v), "percent", 3) for v in (least, low, middle, high)]
        )
    sheet.table(
        "margins",
        "Margins of the sampled rotors, as shares of the limit",
        [{"title": "Criterion", "width": 0.44}]
        + [{"title": t, "align": "right"} for t in ("Least", "5 %", "Median", "95 %")],
        rows,
        note="A share of the rotors as given in the heading has no more margin than this.",
    )
    varying = [i for i in range(len(study.titles)) if varies(study.outcomes.margin[i])]
    if varying:
        histogram(sheet, study, varying[:4])
        cumulative(sheet, study, varying[:4])


def drivers(sheet: Sheet, study: Study) -> None:
    """Show Sobol' indices of each margin, largest first."""
    rows: list[list[Inline]] = []
    missing = []
    for number, found in enumerate(study.sensitivities):
        name = f"C{number + 1}"
        if found.first is None or found.total is None:
            missing.append(f"{name}: {found.reason}")
            continue
        for n, i in enumerate(np.argsort(-found.total)[:8]):
            first, total = found.first_interval, found.total_interval
            rows.append(
                [
                    name if n == 0 else "",
                    study.varied[i].title,
                    _index(found.first[i]),
                    _between(first, i),
                    _index(found.total[i]),
                    _between(total, i),
                ]
            )
    if rows:
        sheet.table(
            "sensitivities",
            "Sobol' indices of the margins",
            [
                {"title": "Criterion", "width": 0.12},
                {"title": "Input", "width": 0.34},
                {"title": "First order", "align": "right"},
                {"title": "Interval", "align": "right"},
                {"title": "Total", "align": "right"},
                {"title": "Interval", "align": "right"},
            ],
            rows,
            row_header=False,
            note=f"Intervals at {100 * study.confidence:.4g} % by 200 resamples of the samples. "
            "An estimate of a share near 0 may come out slightly negative.",
        )
    if missing:
        sheet.paragraph(f"Without indices: {'; '.join(missing)}.")


def _index(value: float) -> str:
    words = f"{value:.3f}".replace("-", "−")
    return "0.000" if words == "−0.000" else words


def _between(interval: Any, i: int) -> str:
    return "–" if interval is None else f"{_index(interval[i][0])} to {_index(interval[i][1])}"


def worst(sheet: Sheet, study: Study) -> None:
    """Show the rotor with the least margin of all, and how it becomes a case of its own."""
    at = study.worst_of()
    if at is None:
        sheet.paragraph("No sampled rotor has a margin: there is no worst one.")
        return
    one = study.worst[at]
    assert one is not None
    settings = worst_settings(study, at)
    sheet.paragraph(
        f"Of all sampled rotors, number {one.sample} has the least margin: "
        f"{sheet.show(one.margin, 'percent', 3)} against C{at + 1}, {study.titles[at]}."
    )
    sheet.table(
        "worst",
        "The worst sampled rotor",
        [
            {"title": "Input", "width": 0.4},
            {"title": "As stated", "align": "right"},
            {"title": "In this rotor", "align": "right"},
            {"title": "Share of the tolerance used", "align": "right"},
        ],
        [
            [
                v.title,
                sheet.show(v.value, v.quantity),
                sheet.show(settings[v.path][0], v.quantity),
                sheet.show((settings[v.path][0] - v.value) / v.half_width, "percent", 3),
            ]
            for v in study.varied
        ],
        note="reportgen worst, given this report's package, writes this rotor, or the worst "
        "against any one criterion, as a case file of its own.",
    )


def conclusion(sheet: Sheet, study: Study) -> list[Inline]:
    """Return in a few sentences how many fail, what decides it, and whether that is allowed."""
    total = study.any_share
    parts: list[Inline] = []
    if total.value is not None and total.interval is not None:
        low, high = (f"{100 * end:.3g} %" for end in total.interval)
        parts += [
            {"ref": "share-any", "text": sheet.show(total.value, "percent")},
            " of the rotors that the tolerances allow fail at least one criterion "
            f"({low} to {high} at {100 * study.confidence:.4g} % confidence). ",
        ]
    failing = [i for i, share in enumerate(study.shares) if share.failing]
    told = max(failing, key=lambda i: study.shares[i].failing) if failing else study.worst_of()
    if told is not None and (leading := study.sensitivities[told].leading) is not None:
        parts.append(
            f"The margin of the {_lower(study.titles[told])} is driven most by "
            f"{_lower(study.varied[leading].title)}. "
        )
    for verdict, what in (
        ("does not meet", "The share is above its limit for"),
        ("not assessed", "The samples do not decide the share for"),
    ):
        named = [j for j in study.judged if j.outcome.verdict == verdict]
        for number, judged in enumerate(named):
            title = judged.outcome.title.partition(": ")[2]
            parts += [f"{what}: " if not number else "; ", {"ref": judged.where, "text": title}]
        parts += [". "] if named else []
    if study.judged and all(j.outcome.verdict == "meets" for j in study.judged):
        parts.append("Every stated share is kept.")
    return parts


def _lower(text: str) -> str:
    return text[:1].lower() + text[1:]


def asked(sheet: Sheet) -> str:
    """Return what the study was asked to find."""
    document = sheet.case.of.case.document
    return (
        f"Find how many rotors that the tolerances of {document.number} revision "
        f"{document.revision} allow fail each criterion, which input decides it, and the worst "
        "rotor."
    )


def series(study: Study) -> dict[str, Any]:
    """Return margins, indices and worst rotors, in SI, for ``results.json``."""
    return {
        "margins": {
            f"C{i + 1}": {"title": study.titles[i], **_counts(row)}
            for i, row in enumerate(study.outcomes.margin)
        },
        "sensitivities": {
            f"C{i + 1}": {
                "inputs": [v.path for v in study.varied],
                "first": _digits(found.first),
                "total": _digits(found.total),
                "reason": found.reason,
            }
            for i, found in enumerate(study.sensitivities)
        },
        "worst": {
            f"C{i + 1}": {
                "title": study.titles[i],
                "margin": one.margin,
                "sample": one.sample,
                "values": {path: text for path, (_, _, text) in worst_settings(study, i).items()},
            }
            for i, one in enumerate(study.worst)
            if one is not None
        },
    }


def _counts(row: Any) -> dict[str, Any]:
    known = row[~np.isnan(row)]
    if not known.size:
        return {"edges": [], "rotors": []}
    if not varies(row):
        return {"edges": _digits([known.min(), known.max()]), "rotors": [int(known.size)]}
    counts, edges = np.histogram(known, BINS)
    return {"edges": _digits(edges), "rotors": [int(n) for n in counts]}


def _digits(values: Any) -> list[float] | None:
    return None if values is None else [float(f"{v:.9g}") for v in values]
