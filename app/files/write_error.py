"""Why a file could not be written, as one sentence for the person who wanted it."""

import errno
from pathlib import Path

from app.files.quoting import quote, quote_end

_ELSEWHERE = "choose another folder"
_REASONS: dict[int, tuple[str, str]] = {
    errno.ENOSPC: ("the disk is full", f"free some space or {_ELSEWHERE}"),
    errno.EDQUOT: ("your share of the disk is used up", f"free some space or {_ELSEWHERE}"),
    errno.EFBIG: ("it would be larger than the system allows", f"{_ELSEWHERE} or save less"),
    errno.EACCES: ("permission is missing there", f"{_ELSEWHERE} or ask for permission"),
    errno.EPERM: ("permission is missing there", f"{_ELSEWHERE} or ask for permission"),
    errno.EROFS: ("that disk is read-only", _ELSEWHERE),
    errno.ENOENT: ("that folder does not exist", f"create it or {_ELSEWHERE}"),
    errno.ENOTDIR: ("that is not a folder", _ELSEWHERE),
    errno.EISDIR: ("a folder has that name", "choose another name"),
    errno.ENAMETOOLONG: ("the name is too long", "choose a shorter one"),
    errno.ELOOP: ("it is a link that leads back to itself", "choose another name"),
    errno.EINVAL: ("the system does not take that name", "choose another name"),
    errno.EIO: ("the disk reported a fault", f"{_ELSEWHERE} on another disk"),
    errno.EBUSY: ("another program is using it", "close it there and save again"),
    errno.ETXTBSY: ("another program is using it", "close it there and save again"),
    errno.EMFILE: ("too many files are open", "close some windows and save again"),
    errno.ENFILE: ("too many files are open", "close some programs and save again"),
}


class WriteError(OSError):
    """A file that could not be saved; the message is one sentence saying what, where, why and what to do.

    Attributes
    ----------
    path : Path
        The file that was asked for.
    replaced : bool
        False: whatever stood there before is unchanged. True: the new contents stand there whole, but the
        disk did not confirm them.
    errno : int or None
        The system's number for the fault, where it came from the system.
    """

    def __init__(self, sentence: str, path: Path, replaced: bool = False, number: int | None = None) -> None:
        super().__init__(sentence)
        self.path = path
        self.replaced = replaced
        # Set afterwards, so that str() stays the bare sentence.
        self.errno = number


def not_written(path: Path, reason: str, advice: str, number: int | None = None) -> WriteError:
    """Say that a file was not saved, why, and what to do next."""
    sentence = f"{_where(path, 'was not saved')} because {reason}: {advice}."
    return WriteError(sentence, path, number=number)


def refused_by_system(path: Path, fault: OSError, replaced: bool = False) -> WriteError:
    """Put a fault reported by the operating system into a sentence."""
    told = (fault.strerror or "the system gave no reason").rstrip(".")
    reason, advice = _REASONS.get(fault.errno or 0, (f"the system reports “{told}”", _ELSEWHERE))
    if not replaced:
        return not_written(path, reason, advice, fault.errno)
    where = _where(path, "was saved")
    sentence = f"{where} but may not outlast a power cut, because {reason}: save it again."
    return WriteError(sentence, path, replaced=True, number=fault.errno)


def _where(path: Path, what: str) -> str:
    if not path.name:
        return f"{quote_end(str(path))} {what}"
    return f"{quote(path.name)} {what} in {quote_end(str(path.parent))}"
