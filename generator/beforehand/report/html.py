"""The HTML shell: one self-contained file that asks nothing of any other, and the template run both media share."""

import base64
import hashlib
import re
from collections.abc import Callable
from importlib.resources import files
from typing import Any, Literal

from jinja2 import Environment, FunctionLoader, StrictUndefined
from markupsafe import Markup

from beforehand.report import fonts
from beforehand.report.characters import printable
from beforehand.report.figures.model import Figure
from beforehand.report.view.model import View

Medium = Literal["screen", "print"]
CHARSET = '<meta charset="utf-8">'


def page(view: View, figures: tuple[Figure, ...]) -> bytes:
    """Draw ``report.html``."""
    pictures = {figure.key: base64.b64encode(figure.svg.encode()).decode() for figure in figures}
    text = fill(
        view,
        medium="screen",
        figure_source=lambda key: f"data:image/svg+xml;base64,{pictures[key]}",
        font_rules=fonts.css(fonts.inline),
    )
    return sealed_off(text).encode()


def fill(view: View, *, medium: Medium, figure_source: Callable[[str], str], font_rules: str) -> str:
    """Run the templates over what the report says; only our own style sheets and script are taken as markup."""
    return (
        _environment()
        .get_template("report.html")
        .render(
            view=view,
            medium=medium,
            figure_source=figure_source,
            fonts=Markup(font_rules),
            styles=Markup(template(f"{medium}.css")),
            script=Markup(template("report.js")) if medium == "screen" else "",
        )
    )


def template(name: str) -> str:
    """Read one file of the templates."""
    return files("beforehand.templates").joinpath(name).read_text("utf-8").replace("\r\n", "\n")


def sealed_off(text: str) -> str:
    """Forbid a page every request, and every style and script but those it has now."""
    directives = (
        "default-src 'none'",
        f"style-src {_checksums(text, 'style')}",
        f"script-src {_checksums(text, 'script')}",
        "font-src data:",
        "img-src data:",
        "base-uri 'none'",
        "form-action 'none'",
    )
    policy = f'<meta http-equiv="Content-Security-Policy" content="{"; ".join(directives)}">'
    head, charset, rest = text.partition(CHARSET)
    if not charset:
        raise ValueError(f"the page has no {CHARSET}, after which the policy belongs")
    return f"{head}{charset}\n{policy}{rest}"


def _checksums(text: str, element: str) -> str:
    found = re.findall(rf"<{element}>(.*?)</{element}>", text, re.DOTALL)
    sums = (base64.b64encode(hashlib.sha256(content.encode()).digest()).decode() for content in found)
    return " ".join(f"'sha256-{checksum}'" for checksum in sums) or "'none'"


def _environment() -> Environment:
    return Environment(
        loader=FunctionLoader(template),
        autoescape=True,
        undefined=StrictUndefined,
        finalize=_drawable,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )


def _drawable(value: Any) -> Any:
    return type(value)(printable(value)) if isinstance(value, str) else value
