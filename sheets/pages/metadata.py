"""What the file says of itself: XMP packet, colour space, archive form (ISO 16684-1, ISO 19005-3)."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import Final
from xml.sax.saxutils import escape

import pikepdf
from pikepdf import Array, Dictionary, Name, String

from sheets.pages.document import Document, IssueContext
from sheets.pages.profile import srgb_profile

PROGRAM: Final = "Jamnut"

PACKET: Final = """<?xpacket begin="\ufeff" id="W5M0MpCehiHzreSzNTczkc9d"?>
<x:xmpmeta xmlns:x="adobe:ns:meta/">
 <rdf:RDF xmlns:rdf="http://www.w3.org/1999/02/22-rdf-syntax-ns#">
  <rdf:Description rdf:about="" xmlns:pdfaid="http://www.aiim.org/pdfa/ns/id/">
   <pdfaid:part>3</pdfaid:part>
   <pdfaid:conformance>B</pdfaid:conformance>
  </rdf:Description>
  <rdf:Description rdf:about="" xmlns:dc="http://purl.org/dc/elements/1.1/">
   <dc:format>application/pdf</dc:format>
   <dc:title><rdf:Alt><rdf:li xml:lang="x-default">{title}</rdf:li></rdf:Alt></dc:title>
   <dc:description><rdf:Alt><rdf:li xml:lang="x-default">{subject}</rdf:li></rdf:Alt></dc:description>
   <dc:creator><rdf:Seq><rdf:li>{program}</rdf:li></rdf:Seq></dc:creator>
   <dc:language><rdf:Bag><rdf:li>{language}</rdf:li></rdf:Bag></dc:language>
  </rdf:Description>
  <rdf:Description rdf:about="" xmlns:xmp="http://ns.adobe.com/xap/1.0/">
   <xmp:CreateDate>{day}</xmp:CreateDate>
   <xmp:ModifyDate>{day}</xmp:ModifyDate>
   <xmp:CreatorTool>{program}</xmp:CreatorTool>
  </rdf:Description>
  <rdf:Description rdf:about="" xmlns:pdf="http://ns.adobe.com/pdf/1.3/">
   <pdf:Producer>{program}</pdf:Producer>
  </rdf:Description>
 </rdf:RDF>
</x:xmpmeta>
<?xpacket end="w"?>"""


@dataclass(frozen=True, kw_only=True)
class About:
    """What a file says of itself."""

    title: str
    subject: str
    language: str
    day: date
    """Of the issue; of the machine's data in a draft. Never that of printing."""


def about(document: Document, issue: IssueContext | None) -> About:
    """From a document and its issue. The date of an issue begins with year, month and day (ISO 8601)."""
    return About(
        title=f"{document.number} {document.title}",
        subject="; ".join(dict.fromkeys(section.title for section in document.sections)),
        language=document.language,
        day=date.fromisoformat(issue.date[:10] if issue else document.data_dated),
    )


def write_metadata(pdf: pikepdf.Pdf, said: About) -> None:
    """Adds the packet and the colour space that black and white are meant in."""
    texts = {"title": said.title, "subject": said.subject, "language": said.language, "program": PROGRAM}
    packet = PACKET.format(day=said.day.isoformat(), **{key: escape(text) for key, text in texts.items()})
    pdf.Root.Metadata = pdf.make_stream(packet.encode(), Type=Name.Metadata, Subtype=Name.XML)
    profile = pdf.make_stream(srgb_profile(), N=3, Alternate=Name.DeviceRGB)
    pdf.Root.OutputIntents = Array(
        [
            pdf.make_indirect(
                Dictionary(
                    Type=Name.OutputIntent,
                    S=Name.GTS_PDFA1,
                    OutputConditionIdentifier=String("sRGB"),
                    Info=String("sRGB, after IEC 61966-2-1"),
                    DestOutputProfile=profile,
                )
            )
        ]
    )
