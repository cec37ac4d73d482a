"""[medium] and [finish] tables, and those that are built in."""

from lumentrace.errors import Notice
from lumentrace.scene.files import Files
from lumentrace.scene.forms import FinishForm, MediumForm
from lumentrace.scene.model import OPAQUE, SHEET, UNCOATED, Finish, Medium
from lumentrace.scene.names import RULE, is_name
from lumentrace.scene.place import Place
from lumentrace.units import AIR_INDEX

BUILT_IN_MEDIA = (
    Medium("air", 1.0, 0.0, place=None),
    Medium("vacuum", 1 / AIR_INDEX, 0.0, place=None),
)
BUILT_IN_FINISHES = (Finish(UNCOATED, 0.0, 0.0, 0.0, uncoated=True, place=None),)

_ROUNDING = 1e-9  # by which shares that add up to one may exceed it


def media_of(files: Files) -> tuple[dict[str, Medium], list[Notice]]:
    """Media by name, the built-in ones too. Raises UserError."""
    return _gathered("medium", files, BUILT_IN_MEDIA, _medium)


def finishes_of(files: Files) -> tuple[dict[str, Finish], list[Notice]]:
    """Finishes by name, the built-in one too. Raises UserError."""
    return _gathered("finish", files, BUILT_IN_FINISHES, _finish)


def _gathered(kind: str, files: Files, built_in: tuple, read) -> tuple[dict, list[Notice]]:
    """What all files define of a kind. One name is defined once; it wins over a built-in one."""
    found, notices = {}, []
    known = {thing.name: thing for thing in built_in}
    for file in files.all:
        for name, form in getattr(file.form, kind).items():
            place = file.place(kind, name)
            if not is_name(name) or name in (OPAQUE, SHEET):
                raise place.error("", f'found "{name}" as the name of a {kind}; {_rule(name)}')
            if name in found:
                raise place.error("", f"is defined twice, first at {found[name].place.at()}")
            if name in known:
                text = f"{place.at()}: {place.name}: used in place of the built-in one"
                notices.append(Notice("told", text))
            found[name] = read(name, form, place, files.scale(file))
    return known | found, notices


def _rule(name: str) -> str:
    return RULE if not is_name(name) else f'"{name}" has a meaning of its own'


def _medium(name: str, form: MediumForm, place: Place, scale: float) -> Medium:
    return Medium(name, form.index, form.absorption / scale, place)


def _finish(name: str, form: FinishForm, place: Place, scale: float) -> Finish:
    shares = {key: getattr(form, key) for key in FinishForm.model_fields}
    total = sum(shares.values())
    if total > 1 + _ROUNDING:
        written = " + ".join(f"{key} {share:g}" for key, share in shares.items() if share)
        raise place.error("", f"the shares add up to {total:g} ({written}); at most 1")
    return Finish(name, **shares, uncoated=False, place=place)
