"""What the section feels: bending, shear flow, torsion, bimoment, cross-bending, von Mises."""
