"""What lies behind one row: the four accounts of a payment, its working, the bond's coupons."""
