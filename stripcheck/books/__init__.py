"""The three workbooks made for people: a pilot's trip, an operator's register, anyone's what-if."""
