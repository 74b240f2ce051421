"""The headless command: a table of cells in, tables and charts out. No window; Qt only where charts are asked for."""
