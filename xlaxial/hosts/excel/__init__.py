"""The Excel (Windows) host, through the BSD-licensed part of xlwings."""

CATEGORY = "xlaxial"
"""The functions' category in the function wizard."""

MOST_ARGUMENTS = 59
"""Arguments of a function in VBA are 60 at most; the one that says where ranges stand is one of them."""
