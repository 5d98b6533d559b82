"""Texts that would act as code where somebody lets them: SQL, formulas, markup, paths, formats, odd letters."""

from __future__ import annotations

MARK = "quinqu"
"""Stands in every one of them, so that it is known again wherever it is shown."""

SQL = (
    f"{MARK}'; DROP TABLE entry; --", f'{MARK}" OR 1=1; --', f"{MARK}'); DELETE FROM batch; --",
    f"{MARK}\\'; UPDATE entry SET number=1; --", f"{MARK}%' OR '1'='1", f"{MARK}'||(SELECT hex(key))||'",
    f"{MARK};ATTACH DATABASE 'x' AS y;", f"{MARK}:name ?1 @p $q",
)  # fmt: skip
FORMULAS = (
    f"=cmd|' /C calc'!{MARK}", f"+1+{MARK}", f"-2+{MARK}", f"@SUM({MARK})", f'=HYPERLINK("http://x","{MARK}")',
    f"\t={MARK}", f"\r={MARK}", f"={MARK}\n=1", f"'={MARK}", f"=IMPORTXML({MARK})", f"\uff1d{MARK}",
)  # fmt: skip
MARKUP = (
    f"<b>{MARK}</b>", f"<img src='file:///etc/hostname' alt='{MARK}'>", f"<a href='http://x'>{MARK}</a>",
    f"<script>{MARK}()</script>", f"</td></table><h1>{MARK}</h1>", f"<!-- {MARK} -->", f"&lt;b&gt;{MARK}&amp;",
    f"<style>*{{display:none}}</style>{MARK}", f"<svg onload={MARK}>", f"<![CDATA[{MARK}]]>",
    f"<html><body background='x'>{MARK}", f"**{MARK}** _x_ [y](z)",
)  # fmt: skip
PATHS = (
    f"../../{MARK}", f"..\\..\\{MARK}", f"/etc/{MARK}", f"C:\\{MARK}", f"{MARK}/../x", f"~/{MARK}", f"file:///{MARK}",
    f"\\\\server\\{MARK}", f"{MARK}%2e%2e%2f", f"CON.{MARK}", f"{MARK}?mode=memory&x#y",
)  # fmt: skip
FORMATS = (
    f"%s%n%x{MARK}", f"{{0.__class__}}{MARK}", f"{{{MARK}}}", f"${{{MARK}}}", f"%({MARK})s",
    f"{MARK}\\n\\x00", f"[[{MARK}]]",
)  # fmt: skip
LETTERS = (
    f"\u202e{MARK}", f"{MARK}\u200b\ufeff", f"{MARK}\x1b[2J\x07", f"{MARK}\u2028x\u2029y", f"e\u0301{MARK}\U0001f600",
)  # fmt: skip
ALL = (*SQL, *FORMULAS, *MARKUP, *PATHS, *FORMATS, *LETTERS)
