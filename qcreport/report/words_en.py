"""English. Another language is a class like this one in a file of its own, named in `words.py`."""

from __future__ import annotations

from qcreport.report.words_en_answers import AnswerWords
from qcreport.report.words_en_arithmetic import ArithmeticWords
from qcreport.report.words_en_beside import BesideWords
from qcreport.report.words_en_checking import CheckingWords
from qcreport.report.words_en_pages import PageWords
from qcreport.report.words_en_sections import SectionWords


class Words(AnswerWords, SectionWords, BesideWords, ArithmeticWords, CheckingWords, PageWords):
    """All texts of a report in English."""

    DATE = "%Y-%m-%d"
    DECIMAL_MARK = "."

    ANSWER = "Answer"
    EVERY_VALUE = "Every value"
    HOW_FAR_APART = "How far apart"
    WHY = "Why this procedure"
    ARITHMETIC = "The arithmetic, to be redone by hand"
    SENSITIVITY = "Sensitivity, not a second finding"
    DATA = "Data, cell by cell"
    FLAGGED = "Flagged and left out"
    ORIGIN = "Where this comes from"
    CHECKING = "How to check without our software"
    TERMS = "Terms"
    CAUTIONS = "Cautions"
    STATED = "Stated by the laboratory"
    BASIS = "What it rests on"
    SIGNING = "Signatures"
