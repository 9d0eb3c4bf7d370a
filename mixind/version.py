"""The version of this package; the build reads it from here."""

VERSION = "0.1.0"
