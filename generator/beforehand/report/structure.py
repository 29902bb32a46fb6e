"""The tree of tags in a PDF, mended where WeasyPrint's says something else than the page.

"Tagged PDF" in ISO 32000-1, 14.8; the rules for accessible files are those of ISO 14289-1, section 7.
"""

from collections.abc import Iterator
from typing import Any

import pydyf  # type: ignore[import-untyped]

PIXELS_PER_POINT = 4 / 3


def dictionaries(pdf: pydyf.PDF, kind: str) -> Iterator[pydyf.Dictionary]:
    """Give the objects of one /Type."""
    for item in pdf.objects:
        if isinstance(item, pydyf.Dictionary) and item.get("Type") == kind:
            yield item


def target(pdf: pydyf.PDF, reference: bytes) -> Any:
    """Give the object that a reference ("12 0 R") stands for."""
    return pdf.objects[int(reference.split()[0])]


def kids(pdf: pydyf.PDF, element: pydyf.Dictionary) -> list[pydyf.Dictionary]:
    """Give the elements, and the references to links, directly below an element."""
    return [target(pdf, kid) for kid in element.get("K", ()) if isinstance(kid, bytes)]


def scope_headings(pdf: pydyf.PDF) -> None:
    """Say of every heading cell whether it heads a column or a row, and list the names that cells refer to."""
    named = {}
    for cell in dictionaries(pdf, "/StructElem"):
        if cell["S"] == "/TH":
            group = target(pdf, target(pdf, cell["P"])["P"])
            cell["A"]["Scope"] = "/Column" if group["S"] == "/THead" else "/Row"
            named[cell["ID"].string] = cell.reference
    names = [item for name in sorted(named) for item in (pydyf.String(name), named[name])]
    if names:
        target(pdf, pdf.catalog["StructTreeRoot"])["IDTree"] = pydyf.Dictionary({"Names": pydyf.Array(names)})


def mend_lists(pdf: pydyf.PDF) -> None:
    """Leave nothing but items in lists: each <div> of a <dl> becomes one, what else stands between goes into them."""
    for element in list(dictionaries(pdf, "/StructElem")):
        for kid in kids(pdf, element) if element["S"] == "/L" else ():
            if kid["S"] == "/Div":
                _as_item(pdf, kid)
            elif not kid["K"]:  # a box without content, made by a style
                element["K"].remove(kid.reference)
            elif kid["S"] not in ("/L", "/LI", "/Caption"):  # a space between two items
                _give_to_item_before(pdf, element, kid)
    for element in list(dictionaries(pdf, "/StructElem")):
        parts = kids(pdf, element) if element.get("S") == "/L" else []
        if parts and all(part["S"] == "/L" for part in parts):  # columns, or one line, of the same list
            _flatten(pdf, element, parts)


def _flatten(pdf: pydyf.PDF, whole: pydyf.Dictionary, parts: list[pydyf.Dictionary]) -> None:
    whole["K"] = pydyf.Array(item for part in parts for item in part["K"])
    for item in kids(pdf, whole):
        item["P"] = whole.reference
    for part in parts:
        part.clear()


def _as_item(pdf: pydyf.PDF, group: pydyf.Dictionary) -> None:
    group["S"] = "/LI"
    parts = kids(pdf, group)
    for place, part in enumerate(parts):
        part["S"] = "/Lbl" if place == 0 and len(parts) > 1 else "/LBody"
        for body in kids(pdf, part):
            body["S"] = "/NonStruct"


def _give_to_item_before(pdf: pydyf.PDF, whole: pydyf.Dictionary, space: pydyf.Dictionary) -> None:
    place = whole["K"].index(space.reference)
    body = kids(pdf, target(pdf, whole["K"][place - 1]))[-1]
    del whole["K"][place]
    body["K"].append(space.reference)
    space["P"] = body.reference


def join_links(pdf: pydyf.PDF) -> None:
    """Take away the links inside links: WeasyPrint makes one for each part of <a>, over the one of the whole."""
    root = target(pdf, pdf.catalog["StructTreeRoot"])
    inner = {id(link) for link in _links_in_links(pdf, root, inside=False)}
    for page in dictionaries(pdf, "/Page"):
        if "Annots" in page:
            page["Annots"][:] = [link for link in page["Annots"] if id(target(pdf, link)) not in inner]
    numbers = target(pdf, root["ParentTree"])["Nums"]
    gone = {link["StructParent"] for link in dictionaries(pdf, "/Annot") if id(link) in inner}
    numbers[:] = [
        item for key, owner in zip(numbers[::2], numbers[1::2], strict=True) if key not in gone for item in (key, owner)
    ]
    for link in list(dictionaries(pdf, "/Annot")):
        if id(link) in inner:
            link.clear()


def _links_in_links(pdf: pydyf.PDF, element: pydyf.Dictionary, *, inside: bool) -> Iterator[pydyf.Dictionary]:
    """Find the links below another link, and take them out of the tree."""
    within = inside or element.get("S") == "/Link"
    if inside and element["S"] == "/Link":
        element["S"] = "/Span"
    for kid in kids(pdf, element):
        if kid.get("Type") != "/OBJR":
            yield from _links_in_links(pdf, kid, inside=within)
        elif inside:
            element["K"].remove(kid.reference)
            yield target(pdf, kid["Obj"])
            kid.clear()


def set_margins_apart(pdf: pydyf.PDF) -> None:
    """Mark running heads and feet as no part of the text; WeasyPrint tags them, but outside the tree."""
    root = target(pdf, pdf.catalog["StructTreeRoot"])
    in_tree = {id(element) for element in _below(pdf, root)}
    numbers = target(pdf, root["ParentTree"])["Nums"]
    for page, entry in zip(dictionaries(pdf, "/Page"), numbers[1::2], strict=False):  # after the pages come the links
        outside = {place for place, owner in enumerate(entry) if id(target(pdf, owner)) not in in_tree}
        middle = page["MediaBox"][3] * PIXELS_PER_POINT / 2
        mark_as_artifacts(target(pdf, page["Contents"]), outside, middle)
        entry[:] = ["null" if place in outside else owner for place, owner in enumerate(entry)]
    for element in list(dictionaries(pdf, "/StructElem")):
        if id(element) not in in_tree:
            element.clear()


def mark_as_artifacts(stream: pydyf.Stream, outside: set[int], middle: float) -> None:
    """Turn marked content into running heads (above the middle of the page) or feet."""
    for place, item in enumerate(stream.stream):
        if isinstance(item, pydyf.Dictionary) and item.get("MCID") in outside:
            matrix = next(
                later for later in stream.stream[place:] if isinstance(later, bytes) and later.endswith(b" Tm")
            )
            subtype = "/Header" if float(matrix.split()[5]) < middle else "/Footer"
            stream.stream[place - 1] = "/Artifact"
            stream.stream[place] = pydyf.Dictionary({"Type": "/Pagination", "Subtype": subtype})


def _below(pdf: pydyf.PDF, element: pydyf.Dictionary) -> Iterator[pydyf.Dictionary]:
    for kid in kids(pdf, element):
        yield kid
        yield from _below(pdf, kid)
