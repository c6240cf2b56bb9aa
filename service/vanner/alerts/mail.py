"""The mail that tells a desk of an alert: what is new, why it counts as new, and from whom."""

from __future__ import annotations

from zoneinfo import ZoneInfo

from vanner.alerts.lines import cut, one_line
from vanner.alerts.rendering import environment
from vanner.alerts.views import headline_of, story_view
from vanner.alerts.wording import CARE, full_time, slug
from vanner.records import Message, StoryLine

_SUBJECT_CELLS = 150


def compose_alert(
    story: StoryLine, desk_zone: ZoneInfo, recipients: tuple[str, ...], now_s: float
) -> Message:
    """The mail of one alert. Its key is the same each time, so that it is stored only once.

    Args:
        story: The alert with all its terms and its newest items.
        desk_zone: The time zone in which its times are written.
        recipients: Who is to get it.
        now_s: When it is composed, in Unix seconds.
    """
    raised_s = now_s if story.raised_s is None else story.raised_s
    filled = {
        "care": CARE,
        "desk": one_line(story.desk),
        "raised": full_time(raised_s, desk_zone),
        "story": story_view(story, desk_zone, raised_s),
    }
    templates = environment("vanner.alerts")
    return Message(
        key=f"alert-{slug(story.desk)}-{story.story_id}",
        desk=story.desk,
        recipients=recipients,
        subject=cut(f"[{story.desk}] {headline_of(story)}", _SUBJECT_CELLS),
        body_text=templates.get_template("alert.txt.j2").render(filled),
        body_html=templates.get_template("alert.html.j2").render(filled),
        created_s=now_s,
    )
