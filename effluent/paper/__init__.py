"""PDF papers.

`effluent.paper.sheet` holds what a paper says, as plain values; `effluent.paper.manifest` draws it.
Only the drawing modules load the PDF library.
"""
