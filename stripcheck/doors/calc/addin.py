"""The component that Calc loads: it hands the cells of a formula to the functions of the registry, and the answer back.

Calc's own Python runs this file, and it may be an old one, or one without NumPy: the file keeps to what any Python 3 takes,
so that it can say in the cell what is missing. It imports LibreOffice's modules and can't be imported anywhere else.
"""

import sys

import unohelper
from com.sun.star.lang import XServiceInfo
from striptypes import XFunctions

SERVICE = "STRIP"
OLDEST = (3, 11)
PIP = {
    "win32": '"C:\\Program Files\\LibreOffice\\program\\python.exe" -m pip install numpy',
    "darwin": "/Applications/LibreOffice.app/Contents/Resources/python -m pip install numpy",
}
ON_LINUX = "sudo apt install python3-numpy (or your system's own way)"


def missing():
    """A sentence about what this Python lacks, or an empty text."""
    version = ".".join(map(str, sys.version_info[:2]))
    if sys.version_info < OLDEST:
        return (
            "STRIP functions need Python 3.11 or later, and this LibreOffice has Python " + version + ": install a newer "
            "LibreOffice, or fill a workbook with native formulas, which need nothing"
        )
    try:
        import numpy  # noqa: F401
    except ImportError:
        command = PIP.get(sys.platform, ON_LINUX)
        return (
            "STRIP functions need NumPy, which LibreOffice's Python " + version + " has not got: close LibreOffice, type "
            + command + ", and start it again"
        )
    return ""


def functions():
    """The function behind each name: cells in, cells out."""
    import warnings

    from stripcheck.doors.call import prepared
    from stripcheck.doors.functions import FUNCTIONS

    # What has no result becomes a sentence. NumPy's own setting is kept for a thread, and each call may come in a new one.
    warnings.filterwarnings("ignore", category=RuntimeWarning, module="stripcheck")
    return {function.name: answering(prepared(function)) for function in FUNCTIONS}


def answering(call):
    """A method that hands a range back as Calc wants it, and shows words where a defect would show a bare error."""

    def method(*cells):
        try:
            found = call(*cells)
        except Exception as error:
            found = "stripcheck could not work this out: " + type(error).__name__ + " " + str(error)
        return found if isinstance(found, list) else ((found,),)

    return method


class Component(unohelper.Base, XFunctions, XServiceInfo):
    """All functions; each becomes a method the first time that Calc asks for it."""

    def __init__(self, context):
        self._sentence = missing()
        self._functions = {}
        if not self._sentence:
            try:
                self._functions = functions()
            except Exception as error:
                self._sentence = (
                    "STRIP functions could not start: " + type(error).__name__ + " " + str(error) + "; is NumPy up to date?"
                )

    def __getattr__(self, name):
        if not name.isupper():
            raise AttributeError(name)
        method = self._functions.get(name, lambda *cells: ((self._sentence,),))
        setattr(self, name, method)
        return method

    def getImplementationName(self):
        return SERVICE

    def supportsService(self, name):
        return name == SERVICE

    def getSupportedServiceNames(self):
        return (SERVICE,)


g_ImplementationHelper = unohelper.ImplementationHelper()
g_ImplementationHelper.addImplementation(Component, SERVICE, (SERVICE,))
