"""File names that Windows does not take."""

_DEVICES = {
    "CON",
    "PRN",
    "AUX",
    "NUL",
    *(f"{port}{n}" for port in ("COM", "LPT") for n in range(1, 10)),
}
_FORBIDDEN = '<>:"|?*'


def windows_trouble(name: str) -> str:
    """Say what makes a file name unusable on Windows, or "" where nothing does."""
    if name.split(".")[0].rstrip(" ").upper() in _DEVICES:
        return "Windows keeps that name for a device"
    if name.endswith((" ", ".")):
        return "Windows takes no name that ends in a space or a dot"
    if any(letter in _FORBIDDEN or letter < " " for letter in name):
        return f"Windows takes none of {' '.join(_FORBIDDEN)} in a name"
    return ""
