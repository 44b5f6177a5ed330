"""The usual cautions of the work, printed with the plan and the report."""

TEXTS: tuple[str, ...] = (
    "Hot gas and hot metal burn: let probes cool, keep clear of the jet from an open port, wear what the site prescribes.",
    "Work at height only from inspected platforms, with fall protection and a rescue plan.",
    "A duct under pressure blows out of an opened port, one under suction draws in gloves and caps: open slowly, stand aside.",
    "Ports and enclosures can hold toxic or oxygen-poor gas: monitor, ventilate, do not work alone.",
    "Fans and dampers can start without warning: no reach into plenums, isolation by authorised people only.",
    "Do not drill old insulation, gaskets or paint before the owner has ruled out asbestos and lead.",
    "Bond probes and use only permitted devices where dust or gas can explode; leave stacks in a thunderstorm.",
    "Tether tools, keep people from below, and close every hole again when the work is done.",
)
DEFER = (
    "These reminders replace neither local codes and site rules nor the judgement of licensed and competent people."
)
