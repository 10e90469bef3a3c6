"""The report: an outcome as one page and as figures; a section or figure is one file, its words are in words/."""
