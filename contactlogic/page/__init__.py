"""The report as one page for a browser: all papers, and drawings that are live.

The page is one file.  It fetches nothing: style, script and drawings stand in it, and its content
security policy forbids all else (W3C, Content Security Policy Level 3).
"""

from contactlogic.page.build import Section, page

__all__ = ["Section", "page"]
