"""The letterhead: a small file that gives a report its owner's face, without a fork.

.. code-block:: yaml

    reportgen-house: 1
    name: Hollow Oak Pumping Company      # printed above the title
    logo: hollow-oak.svg                  # SVG or PNG, beside this file
    logo alt: Hollow Oak Pumping Company  # what the logo says, in words
    colours: {main: "#23395b", accent: "#8a4b08"}
    paper: a4                             # or letter; by the case's units where absent
    fields: {number: Calculation no., client reference: Order}
    closing:
      - This calculation belongs to Hollow Oak Pumping Company.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from difflib import get_close_matches
from pathlib import Path
from typing import Any, Literal, cast

from reportgen.errors import InputError, Problem

FIELDS = {
    "number": "Document number",
    "revision": "Revision",
    "status": "Status",
    "date": "Date",
    "project": "Project",
    "client_reference": "Client reference",
    "prepared": "Prepared",
    "checked": "Checked",
    "approved": "Approved",
}
"""The title block's entries and how they are named unless the house names them."""

_KEYS = ("reportgen-house", "name", "logo", "logo alt", "colours", "paper", "fields", "closing")
_MOST = 500_000  # bytes: of the file as of the logo
_CONTRAST = 4.5  # WCAG 2.1, success criterion 1.4.3: text against its ground


@dataclass(frozen=True, slots=True)
class House:
    """What a house prints on its reports.

    Parameters
    ----------
    name
        Of the house; printed above the title.
    logo
        Content of an SVG or PNG file.
    logo_alt
        What the logo shows, in words.
    main, accent
        Colours ``#rrggbb``; both readable on white.
    paper
        ``a4`` or ``letter``; empty: by the case's units.
    fields
        Names of the title block's entries, by the keys of :data:`FIELDS`.
    closing
        Paragraphs printed at the end.
    """

    name: str = ""
    logo: bytes = b""
    logo_alt: str = ""
    main: str = "#23395b"
    accent: str = "#8a4b08"
    paper: Literal["", "a4", "letter"] = ""
    fields: dict[str, str] = field(default_factory=dict)
    closing: tuple[str, ...] = ()

    def field_name(self, key: str) -> str:
        """Return how a title-block entry is named here."""
        return self.fields.get(key, FIELDS[key])

    @property
    def logo_kind(self) -> Literal["svg", "png"]:
        """Tell the logo's format from its content."""
        return "png" if self.logo.startswith(b"\x89PNG") else "svg"


def read_house(path: Path | str) -> House:
    """Read a house file.

    Raises
    ------
    InputError
        With every problem found, each with its line and field.
    """
    from ruamel.yaml import YAML
    from ruamel.yaml.error import MarkedYAMLError, YAMLError

    path = Path(path)
    try:
        raw = path.read_bytes()
        if len(raw) > _MOST:
            raise InputError(
                Problem(f"{len(raw)} bytes are too many for a house file", file=str(path))
            )
        data = YAML(typ="rt").load(raw.decode("utf-8"))
    except OSError as error:
        raise InputError(Problem(f"cannot be read: {error.strerror}", file=str(path))) from error
    except UnicodeDecodeError as error:
        raise InputError(Problem("is not UTF-8 text", file=str(path))) from error
    except MarkedYAMLError as error:
        mark = error.problem_mark
        raise InputError(
            Problem(
                f"is not YAML: {error.problem}",
                file=str(path),
                line=mark.line + 1 if mark else 0,
                column=mark.column + 1 if mark else 0,
            )
        ) from error
    except YAMLError as error:
        raise InputError(Problem(f"is not YAML: {error}", file=str(path))) from error
    return _Reader(path, data).house()


def house_files(path: Path | str) -> dict[str, bytes]:
    """Return the house file and its logo by name, as a package keeps them.

    Raises
    ------
    InputError
        As :func:`read_house`.
    """
    from ruamel.yaml import YAML

    path = Path(path)
    house = read_house(path)
    files = {path.name: path.read_bytes()}
    if house.logo:
        files[str(YAML(typ="safe").load(files[path.name])["logo"]).strip()] = house.logo
    return files


class _Reader:
    """Collects every problem of one house file."""

    def __init__(self, path: Path, data: Any) -> None:
        self.path, self.data = path, data
        self.problems: list[Problem] = []

    def house(self) -> House:
        if not isinstance(self.data, dict):
            self.say("", "holds no fields", "begin with reportgen-house: 1")
            raise InputError(self.problems)
        if self.data.get("reportgen-house") != 1:
            self.say(
                "reportgen-house",
                f"format {self.data.get('reportgen-house')!r} is not known",
                "1 would do",
            )
        self.names("", self.data, _KEYS)
        logo = self.logo()
        colours = self.colours()
        house = House(
            name=self.words("name"),
            logo=logo,
            logo_alt=self.words("logo alt") or self.words("name"),
            paper=self.paper(),
            fields=self.fields(),
            closing=self.closing(),
            **colours,
        )
        if logo and not house.logo_alt:
            self.say("logo alt", "is missing", "say what the logo shows, for who cannot see it")
        if self.problems:
            raise InputError(self.problems)
        return house

    def say(self, name: str, message: str, remedy: str = "", within: Any = None) -> None:
        line, column = self.place(self.data if within is None else within, name)
        shown = name if within is None else f"{self.inside(within)}.{name}"
        self.problems.append(Problem(message, remedy, str(self.path), line, column, shown))

    def inside(self, within: Any) -> str:
        return next((str(k) for k, v in self.data.items() if v is within), "")

    @staticmethod
    def place(within: Any, name: str) -> tuple[int, int]:
        try:
            line, column = within.lc.key(name)
        except (AttributeError, KeyError, TypeError):
            return 0, 0
        return line + 1, column + 1

    def names(self, where: str, found: Any, known: tuple[str, ...]) -> None:
        for key in found:
            if key not in known:
                near = get_close_matches(str(key), known, 1)
                remedy = f"did you mean {near[0]!r}?" if near else f"known: {', '.join(known)}"
                self.say(str(key), "is not a field here", remedy, found if where else None)

    def words(self, name: str) -> str:
        value = self.data.get(name, "")
        if not isinstance(value, str):
            self.say(name, f"is {value!r}", "a text would do")
            return ""
        return str(value).strip()

    def logo(self) -> bytes:
        from reportgen.publish.drawing import check_logo

        name = self.words("logo")
        if not name:
            return b""
        if name != Path(name).name:
            self.say("logo", f"{name!r} is not beside this file", "a file beside this one")
            return b""
        try:
            content = (self.path.parent / name).read_bytes()
        except OSError as error:
            self.say("logo", f"{name!r} cannot be read: {error.strerror}", "a file beside this one")
            return b""
        if len(content) > _MOST:
            self.say("logo", f"{name!r} has {len(content)} bytes", f"{_MOST} at most")
            return b""
        if fault := check_logo(content):
            self.say("logo", f"{name!r} {fault}", "a PNG or a plain SVG would do")
            return b""
        return content

    def colours(self) -> dict[str, str]:
        found = self.mapping("colours")
        self.names("colours", found, ("main", "accent"))
        kept: dict[str, str] = {}
        for name in ("main", "accent"):
            if name not in found:
                continue
            value = str(found[name])
            if not re.fullmatch(r"#[0-9a-fA-F]{6}", value):
                self.say(name, f"is {value!r}", 'a quoted "#rrggbb" would do', found)
            elif (ratio := contrast_on_white(value)) < _CONTRAST:
                self.say(
                    name,
                    f"{value} stands out from white by {ratio:.1f}:1 only",
                    f"a darker one, {_CONTRAST}:1 or more, can be read",
                    found,
                )
            else:
                kept[name] = value.lower()
        return kept

    def mapping(self, name: str) -> dict[str, Any]:
        found = self.data.get(name, {})
        if not isinstance(found, dict):
            self.say(name, f"is {found!r}", "named values would do")
            return {}
        return cast("dict[str, Any]", found)

    def paper(self) -> Literal["", "a4", "letter"]:
        value = self.words("paper").lower()
        if value not in ("", "a4", "letter"):
            self.say("paper", f"is {value!r}", "a4 or letter would do")
            return ""
        return cast("Literal['', 'a4', 'letter']", value)

    def fields(self) -> dict[str, str]:
        found = self.mapping("fields")
        known = tuple(key.replace("_", " ") for key in FIELDS)
        self.names("fields", found, known)
        return {
            key.replace(" ", "_"): str(value).strip()
            for key, value in found.items()
            if key in known and str(value).strip()
        }

    def closing(self) -> tuple[str, ...]:
        value = self.data.get("closing", [])
        parts = [value] if isinstance(value, str) else value
        if not isinstance(parts, list) or not all(isinstance(p, str) for p in parts):
            self.say("closing", f"is {value!r}", "a text or a list of texts would do")
            return ()
        return tuple(str(p).strip() for p in parts if p.strip())


def contrast_on_white(colour: str) -> float:
    """Return the contrast ratio of a colour ``#rrggbb`` to white (WCAG 2.1, definition)."""
    channels = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.03928 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    luminance = 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]
    return 1.05 / (luminance + 0.05)
