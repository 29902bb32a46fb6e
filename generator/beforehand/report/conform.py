"""What WeasyPrint leaves open for a file that is PDF/A-2a and PDF/UA-1 at once, closed before the file is written.

ISO 19005-2 (PDF/A-2) and ISO 14289-1 (PDF/UA-1); the findings behind each step come from a validator of both.
"""

from collections.abc import Iterator
from typing import Any

import pydyf  # type: ignore[import-untyped]

ACCESSIBILITY = b"""<rdf:Description xmlns:pdfuaid="http://www.aiim.org/pdfua/ns/id/" rdf:about="">
<pdfuaid:part>1</pdfuaid:part></rdf:Description>
<rdf:Description xmlns:pdfaExtension="http://www.aiim.org/pdfa/ns/extension/"
 xmlns:pdfaSchema="http://www.aiim.org/pdfa/ns/schema#" xmlns:pdfaProperty="http://www.aiim.org/pdfa/ns/property#"
 rdf:about=""><pdfaExtension:schemas><rdf:Bag><rdf:li rdf:parseType="Resource">
<pdfaSchema:schema>PDF/UA identification</pdfaSchema:schema>
<pdfaSchema:namespaceURI>http://www.aiim.org/pdfua/ns/id/</pdfaSchema:namespaceURI>
<pdfaSchema:prefix>pdfuaid</pdfaSchema:prefix>
<pdfaSchema:property><rdf:Seq><rdf:li rdf:parseType="Resource"><pdfaProperty:name>part</pdfaProperty:name>
<pdfaProperty:valueType>Integer</pdfaProperty:valueType><pdfaProperty:category>internal</pdfaProperty:category>
<pdfaProperty:description>Part of ISO 14289 that the file follows</pdfaProperty:description></rdf:li></rdf:Seq>
</pdfaSchema:property></rdf:li></rdf:Bag></pdfaExtension:schemas></rdf:Description>
</rdf:RDF>"""


def conform(document: Any, pdf: pydyf.PDF) -> None:
    """Finish a file of the variant pdf/a-2a; WeasyPrint calls this just before it writes."""
    _allow_no_empty_boxes(document)
    _allow_only_links(pdf)
    _declare_accessible(pdf)
    _scope_headings(pdf)
    _set_margins_apart(pdf)
    pdf.catalog["PageMode"] = "/UseOutlines"


def _allow_no_empty_boxes(document: Any) -> None:
    """Refuse a character that no bundled font can draw; texts go through ``printable`` so that none is left."""
    missing = sorted(code for font in document.fonts.values() for code in font.missing)
    if missing:
        raise RuntimeError("no bundled font can draw " + ", ".join(f"U+{code:04X}" for code in missing))


def _allow_only_links(pdf: pydyf.PDF) -> None:
    """Refuse what the file must not hold: attachments, form fields, and links to anything but pages of the web."""
    if "EmbeddedFiles" in pdf.catalog.get("Names", {}) or "AcroForm" in pdf.catalog:
        raise RuntimeError("the PDF would hold an attachment or a form field")
    for annotation in _dictionaries(pdf, "/Annot"):
        address = str(annotation["A"]["URI"].string) if "A" in annotation else "https:"
        if annotation["Subtype"] != "/Link" or not address.startswith(("https:", "mailto:")):
            raise RuntimeError(f"the PDF would hold more than plain links: {address[:80]}")


def _declare_accessible(pdf: pydyf.PDF) -> None:
    """Say PDF/UA-1 in the metadata, which must describe that entry itself and stay readable without unpacking."""
    metadata = _object(pdf, pdf.catalog["Metadata"])
    metadata.stream = [b"\n".join(metadata.stream).replace(b"</rdf:RDF>", ACCESSIBILITY)]
    metadata.compress = False


def _scope_headings(pdf: pydyf.PDF) -> None:
    """Say of every heading cell whether it heads a column or a row, and list the names that cells refer to."""
    named = {}
    for cell in _dictionaries(pdf, "/StructElem"):
        if cell["S"] == "/TH":
            row = _object(pdf, cell["P"])
            group = _object(pdf, row["P"])
            cell["A"]["Scope"] = "/Column" if group["S"] == "/THead" else "/Row"
            named[cell["ID"].string] = cell.reference
    names = [item for name in sorted(named) for item in (pydyf.String(name), named[name])]
    if names:
        _object(pdf, pdf.catalog["StructTreeRoot"])["IDTree"] = pydyf.Dictionary({"Names": pydyf.Array(names)})


def _set_margins_apart(pdf: pydyf.PDF) -> None:
    """Mark running heads and feet as no part of the text; WeasyPrint tags them, but outside the tree."""
    root = _object(pdf, pdf.catalog["StructTreeRoot"])
    in_tree = {id(element) for element in _below(pdf, root)}
    numbers = _object(pdf, root["ParentTree"])["Nums"]
    for page, entry in zip(_dictionaries(pdf, "/Page"), numbers[1::2], strict=False):  # links come after the pages
        outside = {place for place, owner in enumerate(entry) if id(_object(pdf, owner)) not in in_tree}
        _mark_as_artifacts(_object(pdf, page["Contents"]), outside)
        entry[:] = ["null" if place in outside else owner for place, owner in enumerate(entry)]
    for element in _dictionaries(pdf, "/StructElem"):
        if id(element) not in in_tree:
            element.clear()


def _mark_as_artifacts(stream: pydyf.Stream, outside: set[int]) -> None:
    for place, item in enumerate(stream.stream):
        if isinstance(item, pydyf.Dictionary) and item.get("MCID") in outside:
            stream.stream[place - 1] = "/Artifact"
            stream.stream[place] = pydyf.Dictionary({"Type": "/Pagination"})


def _below(pdf: pydyf.PDF, element: pydyf.Dictionary) -> Iterator[pydyf.Dictionary]:
    for kid in element.get("K", ()):
        if isinstance(kid, bytes):
            child = _object(pdf, kid)
            yield child
            yield from _below(pdf, child)


def _dictionaries(pdf: pydyf.PDF, kind: str) -> Iterator[pydyf.Dictionary]:
    for item in pdf.objects:
        if isinstance(item, pydyf.Dictionary) and item.get("Type") == kind:
            yield item


def _object(pdf: pydyf.PDF, reference: bytes) -> Any:
    return pdf.objects[int(reference.split()[0])]
