"""What pushes water into and out of the retina, in words; the same on the page and on paper."""

TITLE = "What pushes water into and out of the retina"
FLUID = (
    "The pressure of the blood in the vessels (hydrostatic pressure) pushes water out of them; the "
    "pressure inside the eye pushes against it. The proteins of the plasma hold water back in the "
    "vessels (oncotic pressure); proteins that leaked into the retina draw it out. Two barriers, "
    "the walls of the retinal vessels and the pigment epithelium, decide how much follows. The "
    "pigment epithelium pumps water out of the retina all the time.",
    "Of these a clinic sees the pressure inside the eye and, where measured, blood pressure at the "
    "arm and the protein of the plasma. The pressures in the vessels and tissue of the macula, "
    "both barriers and the pump are not seen, so no sum is made of them. The thickness of a scan "
    "shows the balance of all and none of them alone.",
)
