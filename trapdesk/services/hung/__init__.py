"""What was read of the hung antenna: what it says of the antenna and the site, and what to do next."""
