"""The templates of a site, as the pages use them."""

from __future__ import annotations

from qcreport.errors import EnvironmentFailedError
from qcreport.report.templates import TemplateSet, load_templates
from qcreport.settings.site import Site

LAB_PREFIX = "lab/"


def load_site_templates(site: Site) -> TemplateSet:
    """Return the templates of the site's folder.

    Raises
    ------
    ConfigError
        Where one is broken or unknown.
    EnvironmentFailedError
        Where one cannot be read.
    """
    folder = site.root / "templates"
    try:
        files = {p.name: p.read_bytes() for p in sorted(folder.iterdir()) if p.is_file()}
    except OSError as error:
        raise EnvironmentFailedError(
            f"the templates in {folder} cannot be read: {error.strerror}", file=str(folder)
        ) from None
    return load_templates(files)


def lab_templates(templates: TemplateSet) -> tuple[tuple[str, bytes], ...]:
    """Return (file name, bytes) of the files a laboratory may restyle, sorted by name.

    Only these enter the run key: the evidence pages belong to the software and its version, and an upgrade is
    no other setting of the laboratory.
    """
    return tuple(
        (name.removeprefix(LAB_PREFIX), text.encode("utf-8"))
        for name, text in templates.texts
        if name.startswith(LAB_PREFIX)
    )
