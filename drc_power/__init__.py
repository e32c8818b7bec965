"""Safe operating area, junction temperature and derating of the power paths of a KiCad board."""

__version__ = "0.1.0"
