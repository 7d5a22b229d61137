"""Pictures and pages for people: result objects -> here -> files.

`style.py` holds the look that every figure shares and writes figures to disk; a new kind of
picture is one module beside it. Nothing here computes physics. No pyplot: a figure belongs to the
one who asked for it.
"""
