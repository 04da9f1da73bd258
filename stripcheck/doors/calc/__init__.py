"""The door into LibreOffice Calc: an extension that is made from the registry of functions, and its installation."""
