"""A reportlab canvas that writes a tagged PDF: each drawn thing has a meaning or is an artifact.

It leans on reportlab's internals (``_code``, ``__NoDefault__``), which is why the lock keeps
reportlab below its next major version and a test reads the tags back. It is a tagged PDF; nothing
here claims conformance to an accessibility standard.
"""

from typing import Any

from reportlab import rl_config
from reportlab.pdfbase.pdfdoc import PDFArray, PDFDictionary, PDFName, PDFString
from reportlab.pdfgen.canvas import Canvas

from clinic.reports.fonts import REGULAR, register

Kids = list[Any]


class TaggedCanvas(Canvas):  # type: ignore[misc]
    """Draw inside ``begin``/``end`` (structure) and ``mark``/``unmark`` (content)."""

    def __init__(self, target: Any, pagesize: tuple[float, float], lang: str = "en") -> None:
        register()
        rl_config.useA85 = 0  # binary streams: smaller and quicker than the seven-bit default
        super().__init__(target, pagesize=pagesize, invariant=1, initialFontName=REGULAR, lang=lang)
        self._count = 0
        self._marked: Kids = []
        self._pages: list[Kids] = []
        catalog = self._doc.Catalog
        catalog.MarkInfo = PDFDictionary({"Marked": "true"})
        self.setViewerPreference("DisplayDocTitle", "true")
        self._root = PDFDictionary({})
        self._root_ref = self._doc.Reference(self._root, "StructRoot")
        catalog.StructTreeRoot = self._root
        self._document = PDFDictionary({})
        self._document_ref = self._doc.Reference(self._document, "StructDocument")
        self._document_kids: Kids = []
        self._parents: list[tuple[Any, Kids]] = [(self._document_ref, self._document_kids)]

    def _element(self, tag: str, attributes: dict[str, Any]) -> tuple[Any, Any, Kids]:
        """Add a structure element under the one that is open."""
        self._count += 1
        element = PDFDictionary({})
        kids: Kids = []
        reference = self._doc.Reference(element, f"SE{self._count}")
        parent, siblings = self._parents[-1]
        siblings.append(reference)
        array = PDFArray(kids)
        array.sequence = kids
        element.dict.update(
            {
                "Type": PDFName("StructElem"),
                "S": PDFName(tag),
                "P": parent,
                "K": array,
                **attributes,
            }
        )
        return element, reference, kids

    def begin(self, tag: str) -> None:
        """Open a structure element that holds others (Sect, Table, TR)."""
        _, reference, kids = self._element(tag, {})
        self._parents.append((reference, kids))

    def end(self) -> None:
        """Close the structure element opened last."""
        self._parents.pop()

    def mark(self, tag: str, alt: str = "", scope: str = "", columns: int = 0) -> None:
        """Begin content with a meaning (H1, P, TH, TD, Figure), until ``unmark``."""
        attributes: dict[str, Any] = {}
        if alt:
            attributes["Alt"] = PDFString(alt)
        if scope:
            attributes["A"] = PDFDictionary({"O": PDFName("Table"), "Scope": PDFName(scope)})
        if columns > 1:
            attributes["A"] = PDFDictionary({"O": PDFName("Table"), "ColSpan": columns})
        element, reference, kids = self._element(tag, attributes)
        number = len(self._marked)
        self._marked.append(reference)
        element.dict["Pg"] = self._doc.thisPageRef()
        kids.append(number)
        self._code.append(f"/{tag} <</MCID {number}>> BDC")

    def artifact(self) -> None:
        """Begin content without a meaning (rules, page numbers, repeated headers)."""
        self._code.append("/Artifact BMC")

    def unmark(self) -> None:
        """End what ``mark`` or ``artifact`` began."""
        self._code.append("EMC")

    def showPage(self) -> None:
        """Finish the page and tie its content to the structure."""
        super().showPage()
        page = self._doc.Pages.pages[-1]
        page.__NoDefault__ = [*page.__NoDefault__, "StructParents", "Tabs"]
        page.StructParents = len(self._pages)
        page.Tabs = PDFName("S")
        self._pages.append(self._marked)
        self._marked = []

    def save(self) -> None:
        """Write the structure tree and the file."""
        numbers = [part for n, marks in enumerate(self._pages) for part in (n, PDFArray(marks))]
        self._document.dict.update(
            {
                "Type": PDFName("StructElem"),
                "S": PDFName("Document"),
                "P": self._root_ref,
                "K": PDFArray(self._document_kids),
            }
        )
        self._root.dict.update(
            {
                "Type": PDFName("StructTreeRoot"),
                "K": PDFArray([self._document_ref]),
                "ParentTree": PDFDictionary({"Nums": PDFArray(numbers)}),
                "ParentTreeNextKey": len(self._pages),
            }
        )
        super().save()
