"""Files that people write: text -> checked plain values, and back.

A kind of file is one table of keys (`design_file.DESIGN` is the first): reading, writing, hints for
unknown keys and help texts follow from it. A value is an int, float, str, bool, list or dict;
nothing in this room knows a material or an array.
"""
