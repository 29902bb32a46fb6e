"""What WeasyPrint leaves open for a file that is PDF/A-2a and PDF/UA-1 at once, closed before the file is written.

ISO 19005-2 (PDF/A-2) and ISO 14289-1 (PDF/UA-1); the findings behind each step come from a validator of both.
"""

import copy
import io
from typing import Any

import pydyf  # type: ignore[import-untyped]

from beforehand.report import structure
from beforehand.report.structure import dictionaries, target

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
BINARY = {"Length1", "N", "Width"}  # entries of fonts, colour profiles and images
SHORT = b"\r\nendstream"


def conform(document: Any, pdf: pydyf.PDF) -> None:
    """Finish a file of the variant pdf/a-2a; WeasyPrint calls this just before it writes."""
    _allow_no_empty_boxes(document)
    _allow_only_links(pdf)
    structure.scope_headings(pdf)
    structure.mend_lists(pdf)
    structure.join_links(pdf)
    structure.set_margins_apart(pdf)
    _declare_accessible(pdf)
    pdf.catalog["PageMode"] = "/UseOutlines"
    end_no_stream_in_a_return(pdf)


def _allow_no_empty_boxes(document: Any) -> None:
    """Refuse a character that no bundled font can draw; texts go through ``printable`` so that none is left."""
    missing = sorted(code for font in document.fonts.values() for code in font.missing)
    if missing:
        raise RuntimeError("no bundled font can draw " + ", ".join(f"U+{code:04X}" for code in missing))


def _allow_only_links(pdf: pydyf.PDF) -> None:
    """Refuse what the file must not hold: attachments, form fields, and links to anything but pages of the web."""
    if "EmbeddedFiles" in pdf.catalog.get("Names", {}) or "AcroForm" in pdf.catalog:
        raise RuntimeError("the PDF would hold an attachment or a form field")
    for annotation in dictionaries(pdf, "/Annot"):
        address = str(annotation["A"]["URI"].string) if "A" in annotation else "https:"
        if annotation["Subtype"] != "/Link" or not address.startswith(("https:", "mailto:")):
            raise RuntimeError(f"the PDF would hold more than plain links: {address[:80]}")


def _declare_accessible(pdf: pydyf.PDF) -> None:
    """Say PDF/UA-1 in the metadata, which must describe that entry itself and stay readable without unpacking."""
    metadata = target(pdf, pdf.catalog["Metadata"])
    metadata.stream = [b"\n".join(metadata.stream).replace(b"</rdf:RDF>", ACCESSIBILITY)]
    metadata.compress = False


def end_no_stream_in_a_return(pdf: pydyf.PDF) -> None:
    """Keep streams from ending in byte 13, which readers that look for the end of a line do not count as theirs.

    One packed stream in 256 does. An empty line more gives text another end; fonts, profiles and images are left
    unpacked. The last two streams are made while writing: an object that nothing refers to gives them another end.
    """
    for stream in pdf.objects:
        if isinstance(stream, pydyf.Stream) and stream.data.endswith(SHORT):
            if stream.extra.keys() & BINARY:
                stream.compress = False
            else:
                stream.stream.append(b"")
    while any(stream.data.endswith(SHORT) for stream in _made_while_writing(pdf)):
        pdf.add_object(pydyf.Dictionary({"Type": "/Spare"}))


def _made_while_writing(pdf: pydyf.PDF) -> list[pydyf.Stream]:
    """Write a copy to see the streams of all other objects and of their places; neither depends on the identifier."""
    trial = copy.copy(pdf)
    trial.objects = list(pdf.objects)
    trial.write(io.BytesIO(), b"1.7", identifier=False, compress=True)
    made: list[pydyf.Stream] = trial.objects[-2:]
    return made
