"""Which texts a report is printed in."""

from __future__ import annotations

from qcreport.errors import ConfigError, Fault
from qcreport.plan.model import Groups
from qcreport.report.words_de import WordsDe
from qcreport.report.words_en import Words

LANGUAGES: dict[str, type[Words]] = {"de": WordsDe, "en": Words}


def words_for(language: str, groups: Groups) -> Words:
    """Return the texts of a language.

    Raises
    ------
    ConfigError
        Where there are none in that language.
    """
    if language not in LANGUAGES:
        known = ", ".join(sorted(LANGUAGES))
        text = f"there are no texts in the language {language!r}; write one of: {known}"
        raise ConfigError((Fault(text=text, file="site.toml", key="lab.language"),))
    return LANGUAGES[language](groups)
