"""Write pages of HTML that need nothing but themselves: the hand-over file of a hull, the view of a fleet."""
