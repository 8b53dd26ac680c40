"""Deutsch. German: every text of a report; a test holds it to the English one, text by text."""

from __future__ import annotations

from qcreport.report.words_de_answers import AnswerWordsDe
from qcreport.report.words_de_arithmetic import ArithmeticWordsDe
from qcreport.report.words_de_beside import BesideWordsDe
from qcreport.report.words_de_checking import CheckingWordsDe
from qcreport.report.words_de_pages import PageWordsDe
from qcreport.report.words_de_sections import SectionWordsDe
from qcreport.report.words_en import Words


class WordsDe(
    AnswerWordsDe, SectionWordsDe, BesideWordsDe, ArithmeticWordsDe, CheckingWordsDe, PageWordsDe, Words
):
    """All texts of a report in German."""

    DATE = "%d.%m.%Y"
    DECIMAL_MARK = ","

    ANSWER = "Antwort"
    EVERY_VALUE = "Jeder Wert"
    HOW_FAR_APART = "Wie weit auseinander"
    WHY = "Warum dieses Verfahren"
    ARITHMETIC = "Die Rechnung, von Hand nachzurechnen"
    SENSITIVITY = "Gegenprobe, kein zweiter Befund"
    DATA = "Daten, Zelle für Zelle"
    FLAGGED = "Gekennzeichnet und ausgelassen"
    ORIGIN = "Woher dies stammt"
    CHECKING = "Prüfen ohne unsere Software"
    TERMS = "Begriffe"
    STATED = "Angaben des Labors"
    CAUTIONS = "Vorbehalte"
    BASIS = "Worauf es beruht"
    SIGNING = "Unterschriften"
