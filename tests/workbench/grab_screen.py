"""Writes a picture of the whole screen to the file named on the command line."""

import sys

from PySide6.QtGui import QGuiApplication

app = QGuiApplication([])
sys.exit(0 if app.primaryScreen().grabWindow(0).save(sys.argv[1]) else 1)
