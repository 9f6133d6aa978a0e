"""From the bytes of a catalog file to its text: the stated encoding, or what to do about another."""

from __future__ import annotations

import codecs
import re

from optimizer.errors import InputError, Problem
from optimizer.input_file import InputFile

_MARKS = (  # the longer ones first: the mark of UTF-32 begins as that of UTF-16 does
    (codecs.BOM_UTF32_LE, "utf-32"),
    (codecs.BOM_UTF32_BE, "utf-32"),
    (codecs.BOM_UTF8, "utf-8"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)
_LINE_END = re.compile(rb"\r\n|\r|\n")
_INVISIBLE = ("\u200b", "\u2060", "\ufeff")


def decode(source: InputFile, encoding: str) -> str:
    """Return the text in the stated encoding, without byte-order mark and invisible characters.

    Raises InputError that names the encoding met, or the line of the first stray byte or NUL.
    """
    _refuse_other_mark(source, encoding)
    try:
        text = source.data.decode(encoding)
    except UnicodeDecodeError as error:
        raise InputError([_stray(source, encoding, error.start)]) from None
    except (UnicodeError, ValueError):
        raise InputError([_stray(source, encoding, 0)]) from None
    if "\x00" in text:
        raise InputError([_nul(source, text)])
    for sign in _INVISIBLE:
        text = text.replace(sign, "")
    return text


def is_text_encoding(name: str) -> bool:
    """Tell whether this is the name of a text encoding that can be read."""
    try:
        b"a".decode(name)
    except (LookupError, ValueError):
        return name.lower().replace("_", "-").startswith(("utf-16", "utf-32")) and _is_codec(name)
    return True


def _is_codec(name: str) -> bool:
    try:
        codecs.lookup(name)
    except (LookupError, ValueError):
        return False
    return True


def _refuse_other_mark(source: InputFile, encoding: str) -> None:
    met = next((name for mark, name in _MARKS if source.data.startswith(mark)), None)
    stated = codecs.lookup(encoding).name
    if met is None or stated.startswith(met):
        return
    rule = f"the file is in {met.upper()}, expected {stated.upper()}"
    remedy = f'save it again as CSV in UTF-8, or state encoding = "{met}" in source.toml'
    raise InputError([Problem(source.file, 1, None, None, rule, remedy)])


def _stray(source: InputFile, encoding: str, at: int) -> Problem:
    line = len(_LINE_END.findall(source.data, 0, at)) + 1
    byte = source.data[at : at + 1]
    rule = f"this byte is not {codecs.lookup(encoding).name.upper()} text"
    sign = byte.decode("cp1252", "replace")
    remedy = (
        "save the file again as CSV in UTF-8, or state its encoding in source.toml: "
        f'encoding = "cp1252" reads this byte as {sign!r}'
    )
    return Problem(source.file, line, None, f"0x{byte.hex().upper()}", rule, remedy)


def _nul(source: InputFile, text: str) -> Problem:
    line = len(_LINE_END.findall(text[: text.index("\x00")].encode("utf-8", "replace"))) + 1
    rule = "a NUL character, which no text has"
    remedy = 'for UTF-16 without a byte-order mark state encoding = "utf-16-le" in source.toml'
    if source.data.startswith(b"PK"):
        remedy = "this looks like a spreadsheet: save it as CSV in UTF-8, or name it .xlsx"
    return Problem(source.file, line, None, None, rule, remedy)
