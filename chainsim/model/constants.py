"""Numerical constants of the model, each with its unit and its reason.

They stand for properties nobody measures (the stiffness of a tooth, of a stop).  `chainsim run
--unsure` and the confidence section of a report vary those that a finding could depend on.
"""

CONTACT_PER_LINK = 1.0
"""Contact stiffness of a pin on a tooth over that of a link [dimensionless]: at the working pull
the pin then sinks in by less than a hundredth of the pitch, and the links still set the step."""

PIN_RESTITUTION = 0.5
"""Rebound of a pin on a tooth [dimensionless]; moulded plastic on plastic, assumed."""

PIN_IMPACT_SPEED = 0.1
"""Impact speed at which that rebound holds [m/s]: the engagement kick of a chain at 0.13 m/s."""

GRIP_PER_CONTACT = 0.5
"""Tangential over normal contact stiffness [dimensionless]; between 0.67 and 1 for solids
(R. D. Mindlin, J. Appl. Mech. 16 (1949) 259, from memory), lower for moulded parts."""

GRIP_DAMPING = 0.1
"""Damping of a holding friction element, share of critical [dimensionless]."""

BALL_PER_LINK = 0.5
"""Contact stiffness of a ball over that of a link [dimensionless]."""

STOP_PER_LINK = 0.5
"""Stiffness of a mount's end stop over that of a link [dimensionless]."""

STOP_DAMPING = 0.3
"""Damping of an end stop, share of critical with the mount's mass [dimensionless]."""

SLIP_AT_JOINT = 0.01
"""Turn at which a joint's friction slips at its usual load [rad]."""

SLIP_AT_BEARING = 0.01
"""Turn at which a bearing's friction slips at its usual load [rad]."""

SLIP_AT_SLIDE = 20.0e-6
"""Travel at which a slide's friction slips [m]."""

WHEEL_DENSITY = 1200.0
"""Density of a wheel whose inertia is not given: a plastic disk [kg/m3]."""

WHEEL_WIDTH = 0.6
"""Width of that disk in pitches [dimensionless]."""

BACK_HEIGHT = 0.45
"""Half the height of a link's back in pitches [dimensionless]: how far a guide that bears on the
backs keeps from the line of the pins."""

SEARCH_MARGIN = 0.3
"""Margin of the contact search in pitches [dimensionless]."""

STEP_SHARE = 0.6
"""Inner step over its stability limit [dimensionless]: leaves room for contacts that pile up."""
