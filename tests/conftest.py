"""Tests of windows run without a screen, whatever the desktop they are started from."""

import os

os.environ["QT_QPA_PLATFORM"] = "offscreen"
