"""The PDF engine by itself: it draws everything it is handed or fails, and takes nothing else."""

import io
import re
import shutil
import subprocess

import page as validator
import pydyf
import pytest
from pypdf import PdfReader
from pypdf.generic import NullObject

from beforehand.report import conform, fonts, structure
from beforehand.report.pdf import missing_library

if missing_library():
    pytest.skip(f"no PDF here: {missing_library()} is missing", allow_module_level=True)

import weasyprint

from beforehand.report.typeset import typeset

# WeasyPrint opens its colour profile and leaves closing it to Python.
pytestmark = pytest.mark.filterwarnings("ignore:unclosed file .*sRGB2014:ResourceWarning")

RULES = fonts.css(lambda face: f"res:{face.path.name}")
STYLE = """
@page { size: A4; @top-left { content: "running head" } @bottom-right { content: counter(page) " of " counter(pages) } }
html { font-family: Inter, "DejaVu Sans" }
"""
PICTURE = {"one.svg": ("image/svg+xml", b'<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9"/>')}
IMAGE = '<img src="res:one.svg" alt="nothing much">'


def document(body, head=""):
    return (
        f'<!doctype html><html lang="en-GB"><head><meta charset="utf-8"><title>A title</title>{head}'
        f"<style>{RULES}{STYLE}</style></head><body><h1>Head</h1>{body}</body></html>"
    )


TABLE = (
    "<table><caption>T</caption><thead><tr><th scope='col'>id</th><th scope='col'>p</th></tr></thead><tbody>"
    + "".join(f"<tr><th scope='row'>h{row}</th><td>0.{row:03}</td></tr>" for row in range(90))
    + "</tbody></table>"
)
WHOLE = document(
    f'<p>μ₁ ∈ ℍ <a href="#t">see</a> <a href="https://example.org/">x</a></p>{IMAGE}<h2 id="t">B</h2>{TABLE}'
)


@pytest.fixture(scope="module")
def whole():
    return typeset(WHOLE, PICTURE)


def failures(content, profile):
    report = validator.validate_pdf_bytes(content, profile=profile, limits=validator.SafetyLimits.unlimited())
    return [(failure.rule_id, failure.message) for failure in report.failures]


@pytest.mark.parametrize("profile", ["2a", "ua1"])
def test_the_file_conforms(whole, profile):
    assert failures(whole, profile) == []


def test_without_the_finisher_it_would_not():
    fetcher = weasyprint.urls.URLFetcher(allowed_protocols=["data"])
    plain = weasyprint.HTML(string=document("<p>text</p>"), url_fetcher=fetcher, base_url="data:")
    assert failures(plain.write_pdf(pdf_variant="pdf/a-2a"), "ua1")


def test_qpdf_finds_no_fault(whole, tmp_path):
    if not shutil.which("qpdf"):
        pytest.skip("qpdf is missing")  # tests/run.sh names it, and fails under `check`
    (tmp_path / "a.pdf").write_bytes(whole)
    subprocess.run(["qpdf", "--check", "--warning-exit-0", tmp_path / "a.pdf"], check=True, capture_output=True)


def test_the_reader_is_set_up(whole):
    catalog = PdfReader(io.BytesIO(whole)).trailer["/Root"]
    assert catalog["/Lang"] == "en-GB"
    assert catalog["/PageMode"] == "/UseOutlines"
    assert catalog["/ViewerPreferences"]["/DisplayDocTitle"]
    assert "/Filter" not in catalog["/Metadata"]
    assert b"pdfuaid:part>1<" in catalog["/Metadata"].get_data()


def test_it_holds_no_clock_no_attachment_no_script_and_only_links(whole):
    reader = PdfReader(io.BytesIO(whole))
    assert not {"/CreationDate", "/ModDate"} & set(reader.metadata)
    assert not {"/AA", "/OpenAction", "/AcroForm", "/AF"} & set(reader.trailer["/Root"])
    assert set(reader.trailer["/Root"]["/Names"]) == {"/Dests"}
    annotations = [entry.get_object() for sheet in reader.pages for entry in sheet.get("/Annots", [])]
    assert [annotation["/Subtype"] for annotation in annotations] == ["/Link", "/Link"]


def test_every_font_is_inside(whole):
    reader = PdfReader(io.BytesIO(whole))
    described = [
        font.get_object()["/DescendantFonts"][0].get_object()
        for sheet in reader.pages
        for font in sheet["/Resources"]["/Font"].values()
    ]
    assert described
    assert all("/FontFile2" in font["/FontDescriptor"] for font in described)
    families = {font["/BaseFont"].partition("+")[2] for font in described}
    assert families == {"Inter", "Inter-Semi-Bold", "DejaVu-Sans"}


def elements(node, kind):
    """Walk the structure tree for elements of one kind."""
    node = node.get_object()
    if isinstance(node, list):
        return [found for kid in node for found in elements(kid, kind)]
    if not isinstance(node, dict):
        return []
    mine = [node] if node.get("/S") == kind else []
    return mine + (elements(node["/K"], kind) if "/K" in node else [])


def test_headings_of_tables_say_what_they_head(whole):
    tree = PdfReader(io.BytesIO(whole)).trailer["/Root"]["/StructTreeRoot"]
    cells = elements(tree["/K"], "/TH")
    scopes = [cell["/A"]["/Scope"] for cell in cells]
    heads = scopes.count("/Column")
    assert scopes.count("/Row") == 90
    assert heads >= 4  # the head of the table, again on every page it goes on
    assert heads % 2 == 0
    names = tree["/IDTree"]["/Names"]
    assert names[::2] == sorted(cell["/ID"] for cell in cells)
    assert [element.get_object()["/ID"] for element in names[1::2]] == names[::2]


def test_running_heads_are_no_part_of_the_text(whole):
    reader = PdfReader(io.BytesIO(whole))
    for sheet in reader.pages:
        assert "running head" in sheet.extract_text()
        content = sheet.get_contents().get_data()
        assert re.findall(rb"/Artifact\n<</Type /Pagination/Subtype /(\w+)>>\nBDC", content) == [b"Header", b"Footer"]
    tree = reader.trailer["/Root"]["/StructTreeRoot"]
    pages = [entry for entry in tree["/ParentTree"]["/Nums"][1::2] if isinstance(entry, list)]
    assert [sum(isinstance(owner, NullObject) for owner in page) for page in pages] == [2] * len(reader.pages)


def outline(node):
    """Write the structure below a node as nested lists of names."""
    node = node.get_object()
    if isinstance(node, list):
        return [found for kid in node for found in outline(kid)]
    if not isinstance(node, dict) or "/S" not in node:
        return []
    below = outline(node["/K"]) if "/K" in node else []
    return below if node["/S"] in ("/NonStruct", "/Span") else [[node["/S"][1:], *below]]


def test_a_list_holds_nothing_but_items():
    """Terms in <div>, set side by side in one line, with the empty box of a style at the end."""
    style = "<style>dl div { display: inline-block } dl::after { content: ''; display: block; clear: left }</style>"
    body = f"{style}<dl>{'<div><dt>term</dt> <dd>what it is</dd></div> ' * 3}</dl>"
    content = typeset(document(body), {})
    assert failures(content, "ua1") == []
    tree = PdfReader(io.BytesIO(content)).trailer["/Root"]["/StructTreeRoot"]
    item = ["LI", ["Lbl"], ["LBody"]]
    assert outline(tree["/K"]) == [["Document", ["H1"], ["L", item, item, item]]]


def test_a_list_in_columns_is_one_list():
    body = f"<style>ol {{ columns: 2; list-style: none }}</style><ol>{'<li>x</li>' * 4}</ol>"
    tree = PdfReader(io.BytesIO(typeset(document(body), {}))).trailer["/Root"]["/StructTreeRoot"]
    assert outline(tree["/K"]) == [["Document", ["H1"], ["L", *[["LI", ["LBody"]]] * 4]]]


def test_a_link_with_parts_is_one_link():
    style = "<style>a { display: block } a::after { content: '9'; float: right }</style>"
    content = typeset(document(f'{style}<p><a href="#t"><span>1</span> <code>two</code></a></p><h2 id="t">T</h2>'), {})
    assert failures(content, "ua1") == []
    reader = PdfReader(io.BytesIO(content))
    assert len(reader.pages[0]["/Annots"]) == 1
    tree = reader.trailer["/Root"]["/StructTreeRoot"]
    assert outline(tree["/K"]) == [["Document", ["H1"], ["P", ["Link"]], ["H2"]]]


def small_file(title):
    pdf = pydyf.PDF()
    pdf.info["Title"] = pydyf.String(title)
    pdf.add_page(
        pydyf.Dictionary({"Type": "/Page", "Parent": pdf.pages.reference, "MediaBox": pydyf.Array([0, 0, 9, 9])})
    )
    return pdf


def written(pdf):
    out = io.BytesIO()
    pdf.write(out, b"1.7", identifier=True, compress=True)
    return out.getvalue()


@pytest.mark.parametrize(("extra", "packed"), [({}, True), ({"Length1": 1}, False)])
def test_a_packed_stream_does_not_end_in_a_return(extra, packed):
    """The last byte of a zlib stream is that of the Adler-32 sum, here 1 + 12 (RFC 1950)."""
    pdf = small_file("x")
    stream = pydyf.Stream([b"\x0c"], extra, compress=True)
    pdf.add_object(stream)
    assert stream.data.endswith(b"\r\nendstream")
    conform.end_no_stream_in_a_return(pdf)
    assert b"\r\nendstream" not in written(pdf)
    assert stream.compress is packed


def test_the_streams_made_while_writing_do_not_end_in_a_return_either():
    titles = [str(number) for number in range(1000) if b"\r\nendstream" in written(small_file(str(number)))]
    assert titles
    for title in titles:
        pdf = small_file(title)
        conform.end_no_stream_in_a_return(pdf)
        assert b"\r\nendstream" not in written(pdf)
        assert b"/Spare" in b"".join(item.data for item in pdf.objects[1:])


SECRET = "a line that must not be read"
ATTACKS = {
    "file": '<img src="file://{file}" alt="x">',
    "absolute": '<img src="{file}" alt="x">',
    "relative": '<img src="secret.txt" alt="x">',
    "http": '<img src="http://127.0.0.1:9/x.png" alt="x">',
    "data": '<img src="data:image/svg+xml,&lt;svg/&gt;" alt="x">',
    "unknown resource": '<img src="res:two.svg" alt="x">',
    "object": '<object data="file://{file}"></object>',
    "embed": '<embed src="file://{file}">',
    "background": '<p style="background:url(file://{file})">x</p>',
    "content": "<style>p::before {{ content: url(file://{file}) }}</style><p>x</p>",
    "list style": '<ul style="list-style-image:url(file://{file})"><li>x</li></ul>',
    "import": "<style>@import url(file://{file});</style>",
    "font": "<style>@font-face {{ font-family: F; src: url(file://{file}) }} p {{ font-family: F }}</style><p>x</p>",
    "attached link": '<a rel="attachment" href="file://{file}">x</a>',
    "base": '<base href="file:///"><img src="etc/hostname" alt="x">',
    "file link": '<a href="file://{file}">x</a>',
    "script link": '<a href="javascript:alert(1)">x</a>',
}
HEADS = {
    "style sheet": '<link rel="stylesheet" href="file://{file}">',
    "attachment": '<link rel="attachment" href="file://{file}">',
}
PICTURES = {
    "image in a picture": '<image href="file://{file}" width="9" height="9"/>',
    "import in a picture": "<style>@import url(file://{file});</style>",
}


@pytest.fixture
def secret(tmp_path):
    path = tmp_path / "secret.txt"
    path.write_text(SECRET)
    return path


@pytest.mark.parametrize("attack", [*ATTACKS, *HEADS, *PICTURES])
def test_nothing_is_fetched(attack, secret):
    body = ATTACKS.get(attack, IMAGE).format(file=secret)
    head = HEADS.get(attack, "").format(file=secret)
    picture = PICTURES.get(attack, "").format(file=secret)
    svg = f'<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9">{picture}</svg>'
    with pytest.raises(RuntimeError, match=r"was not handed|is not whole|would hold"):
        typeset(document(body, head), {"one.svg": ("image/svg+xml", svg.encode())})


def test_a_foreign_part_in_a_picture_is_passed_over(secret):
    svg = '<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9">{}</svg>'
    use = f'<use href="file://{secret}#a"/>'
    with_use, without = ({"one.svg": ("image/svg+xml", svg.format(part).encode())} for part in (use, ""))
    assert typeset(document(IMAGE), with_use) == typeset(document(IMAGE), without)


def test_an_entity_in_a_picture_reads_no_file(secret):
    svg = (
        f'<!DOCTYPE svg [<!ENTITY x SYSTEM "file://{secret}">]>'
        '<svg xmlns="http://www.w3.org/2000/svg" width="99" height="9"><text y="9">&x;</text></svg>'
    )
    with pytest.raises(RuntimeError, match="is not whole"):
        typeset(document(IMAGE), {"one.svg": ("image/svg+xml", svg.encode())})


@pytest.mark.parametrize(
    ("body", "message"),
    [
        ("<p>冷</p>", r"no bundled font can draw U\+51B7"),
        ('<img src="res:one.svg">', "no required alt"),
        ('<a href="#nowhere">x</a>', "nowhere"),
        ("<style>p { florid: yes }</style>", "florid"),
    ],
)
def test_a_slip_in_a_template_stops_the_report(body, message):
    with pytest.raises(RuntimeError, match=message):
        typeset(document(body), PICTURE)


def test_a_mark_in_the_margin_is_found_by_its_number():
    marked = (["/Span", pydyf.Dictionary({"MCID": number}), b"BDC", b"1 0 0 -1 75 65.5 Tm"] for number in (0, 1))
    stream = pydyf.Stream([item for items in marked for item in items])
    structure.mark_as_artifacts(stream, {1}, middle=500)
    assert stream.stream[:2] == ["/Span", {"MCID": 0}]
    assert stream.stream[4:6] == ["/Artifact", {"Type": "/Pagination", "Subtype": "/Header"}]
