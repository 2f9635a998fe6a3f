"""What a certificate is not, and the standards that remain to be met. Titles as of 2025; check the editions."""

from __future__ import annotations

from .document import Block, Caution, Items, said

MODEL = "This is about the model stated in the claim, not about a machine."
NEITHER = "A certificate is neither a risk assessment nor a statement of conformity with any standard."
STANDARDS = (
    (
        "ISO 12100:2010",
        "Safety of machinery - General principles for design - Risk assessment and risk reduction",
        "a revision, ISO/DIS 12100, has been in enquiry since December 2024",
    ),
    ("ISO 10218-1:2025", "Robotics - Safety requirements - Part 1: Industrial robots", ""),
    ("ISO 10218-2:2025", "Robotics - Safety requirements - Part 2: Industrial robot applications and robot cells", ""),
    (
        "ISO 13482:2014",
        "Robots and robotic devices - Safety requirements for personal care robots",
        "a revision, ISO/DIS 13482:2024, is titled Robotics - Safety requirements for service robots",
    ),
    (
        "ISO 25785-1",
        "Robotics - Part 1: Safety requirements for industrial mobile robots with actively controlled stability "
        "(legged, wheeled, or other forms of locomotion) - Part 1: Robots",
        "a project of ISO/TC 299 in progress since February 2025, with no published edition found",
    ),
    (
        "ISO 13849-1:2023",
        "Safety of machinery - Safety-related parts of control systems - Part 1: General principles for design",
        "title from memory",
    ),
)


def cautions() -> list[Block]:
    """The cautions of every report."""
    items = tuple((f"{n}, {title}{f' ({more})' if more else ''}.",) for n, title, more in STANDARDS)
    return [
        Caution(
            (f"{MODEL} Whether the model covers the robot, the ground, its load and its sensors is for you to show.",)
        ),
        said(
            f"{NEITHER} A falling robot hurts people. Assessing and reducing risk remains with the standards that "
            "apply, and with the competent persons responsible. Among these standards are:"
        ),
        Items(items),
        said("Check the current editions. Test with barriers, fall protection and an emergency stop."),
    ]
