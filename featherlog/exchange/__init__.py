"""Files in and out: design and machine files, tables. Units are converted only here."""
