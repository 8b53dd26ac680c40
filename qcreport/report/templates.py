"""Templates: the laboratory's letterhead, footer, remark and style; the evidence pages are the package's."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import lru_cache

from jinja2 import FunctionLoader, StrictUndefined, TemplateError, TemplateSyntaxError
from jinja2.sandbox import ImmutableSandboxedEnvironment
from markupsafe import Markup, escape

from qcreport.canonical import sha256_hex
from qcreport.errors import ConfigError, Fault
from qcreport.report.assets import page_names, page_text, shipped_templates
from qcreport.report.shapes import BASELINE, STYLES

LAB_FILES: tuple[str, ...] = ("footer.html", "letterhead.html", "remark.html", "style.css")
"""What the laboratory may restyle."""

_SUPERSCRIPT = re.compile("[⁻⁰¹²³⁴⁵⁶⁷⁸⁹]*⁻[⁰¹²³⁴⁵⁶⁷⁸⁹]+")
_TO_PLAIN = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789−")
_FETCHING = re.compile(r"url\s*\(|@import|expression\s*\(|\\", re.IGNORECASE)


@dataclass(frozen=True, slots=True, kw_only=True)
class TemplateSet:
    """Everything a report is set with."""

    texts: tuple[tuple[str, str], ...]
    """(name, text); the laboratory's files as `lab/NAME`, the evidence pages by plain name."""
    digests: tuple[tuple[str, str], ...]
    """(name, SHA-256) of each, sorted by name; what enters the run key."""
    changed: tuple[str, ...]
    """Names of the laboratory's files that differ from the shipped ones."""

    def text(self, name: str) -> str:
        """Return one text by its name."""
        return dict(self.texts)[name]


def load_templates(site_templates: Mapping[str, bytes]) -> TemplateSet:
    """Return the templates of a site over the shipped ones.

    Parameters
    ----------
    site_templates : mapping
        File name → bytes, from the site's folder `templates/`. What is absent is used as shipped.

    Raises
    ------
    ConfigError
        For a name we do not know, text that is not UTF-8, broken template syntax or a style that would
        fetch something; with file and line.
    """
    shipped = shipped_templates()
    faults: list[Fault] = []
    texts: dict[str, str] = {name: page_text(name) for name in page_names()}
    changed = []
    for name in sorted(site_templates):
        if name not in LAB_FILES:
            known = ", ".join(LAB_FILES)
            faults.append(
                Fault(text=f"is not a template we know; known are {known}", file=f"templates/{name}")
            )
    for name in LAB_FILES:
        data = site_templates.get(name, shipped[name])
        if data != shipped[name]:
            changed.append(name)
        try:
            texts[f"lab/{name}"] = data.decode("utf-8")
        except UnicodeDecodeError as error:
            line = data[: error.start].count(b"\n") + 1
            faults.append(
                Fault(text="is not UTF-8 text; save it as UTF-8", file=f"templates/{name}", line=line)
            )
            continue
        faults += _faults(name, texts[f"lab/{name}"])
    if faults:
        raise ConfigError(tuple(faults))
    return TemplateSet(
        texts=tuple(sorted(texts.items())),
        digests=tuple(sorted((name, sha256_hex(text.encode())) for name, text in texts.items())),
        changed=tuple(changed),
    )


def _faults(name: str, text: str) -> list[Fault]:
    file = f"templates/{name}"
    if name.endswith(".css"):
        found = _FETCHING.search(text)
        if found is None:
            return []
        line = text[: found.start()].count("\n") + 1
        return [Fault(text=f"a style may not fetch or escape ({found.group()})", file=file, line=line)]
    try:
        _bare_environment().parse(text, filename=file)
    except TemplateSyntaxError as error:
        return [Fault(text=f"broken template: {error.message}", file=file, line=error.lineno)]
    return []


def _bare_environment() -> ImmutableSandboxedEnvironment:
    return ImmutableSandboxedEnvironment(undefined=StrictUndefined, autoescape=True, trim_blocks=False)


@lru_cache(maxsize=4)
def environment(templates: TemplateSet) -> ImmutableSandboxedEnvironment:
    """Return the sandbox in which the pages are filled in."""
    env = _bare_environment()
    texts = dict(templates.texts)

    def found(name: str) -> tuple[str, str, Callable[[], bool]] | None:
        return (texts[name], name, lambda: True) if name in texts else None

    env.loader = FunctionLoader(found)  # with file names, so that a fault has its place
    env.filters["typeset"] = typeset
    env.globals["styles"] = {name: Markup(text) for name, text in STYLES.items()}  # noqa: S704 - our own constants
    env.globals["baseline"] = BASELINE
    return env


def typeset(text: str) -> Markup:
    """Return escaped text with negative exponents set as superscripts, which the fonts lack as characters."""
    parts, last = [], 0
    for found in _SUPERSCRIPT.finditer(text):
        parts.append(escape(text[last : found.start()]))
        parts.append(Markup("<sup>{}</sup>").format(found.group().translate(_TO_PLAIN)))
        last = found.end()
    parts.append(escape(text[last:]))
    return Markup("").join(parts)


def template_fault(error: TemplateError) -> ConfigError:
    """Return what went wrong while a template was filled in, with file and line where they are known."""
    file, line = "templates", None
    trace = error.__traceback__
    while trace is not None:
        name = trace.tb_frame.f_code.co_filename
        if name.startswith("lab/"):
            file, line = f"templates/{name.removeprefix('lab/')}", trace.tb_lineno
        trace = trace.tb_next
    return ConfigError((Fault(text=f"cannot be filled in: {error}", file=file, line=line),))
