"""Reading and writing of numbers, tables and files. Knows no screen."""
