"""The program around the science: session, files, charts, window and headless command."""
