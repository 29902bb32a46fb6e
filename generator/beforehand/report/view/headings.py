"""The sections of the report, in reading order."""

from beforehand.report.view.model import Heading

TITLES = {
    "summary": "Summary of decisions",
    "promised": "What was promised",
    "inputs": "Inputs",
    "analysed": "Rows analysed",
    "results": "Results, family by family",
    "warnings": "Warnings",
    "departures": "Departures and amendments",
    "firmness": "How firm are these decisions?",
    "second": "Second computation",
    "checklist": "Reporting checklist",
    "methods": "Methods, cautions and sign-off",
    "appendix": "Appendix: every test in full",
}
HEADINGS = {
    anchor: Heading(number=str(at), title=title, anchor=anchor) for at, (anchor, title) in enumerate(TITLES.items(), 1)
}


def section(anchor: str) -> str:
    """Refer to a section: "section 6"."""
    return f"section {HEADINGS[anchor].number}"
