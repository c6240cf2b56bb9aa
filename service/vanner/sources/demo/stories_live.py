"""The stories that unfold while the user looks on, one a desk, as written.

Their spans count for nothing: they are fitted to the first half of the live time.
"""

from __future__ import annotations

from vanner.sources.demo.script import StoryScript, script

LIVE_STORIES: tuple[StoryScript, ...] = (
    script(
        "Wedding ferry aground",
        "newsroom",
        "aground, sandbank, wedding, bride, confetti",
        1.0,
        """
ebbing-wire | Ferry aground off Ossenhithe
A ferry with a hundred and twenty guests has run aground on a sandbank in the mouth of the Quarle.
A bride and her party are on board. Nobody is reported hurt.

harbour-press | Passenger vessel aground, tugs on the way
A passenger vessel chartered for a wedding is aground on the Middle Patch sandbank. Two tugs and the
lifeboat are on their way. The bride has asked how long it will take.

courier | Bride and guests stuck on sandbank
The Humble Pilgrim sits aground on a sandbank within sight of the church where the wedding was to
begin at noon. The groom is on the mole. The bride is on the foredeck with a megaphone.

saltpan-echo | Confetti on the sandbank
Guests of a wedding have climbed down to the sandbank and are playing football in their good shoes.
The ferry is hard aground, and so is the cake. There is confetti as far as the buoy.

ebbing-wire | Wedding goes ahead on sandbank, says vicar
A vicar was rowed out to the ferry aground off Ossenhithe. He will marry bride and groom on the
sandbank before the tide covers it, which leaves forty minutes and no time for the long hymn.

courier | "I do", said the bride, up to her ankles
The bride said yes on a sandbank to which no parish lays claim. The wedding was witnessed by the
lifeboat crew. The ferry stays aground until the flood; the confetti has already left.

harbour-press | Flood tide: ferry no longer aground
The ferry came off the sandbank on the flood and is no longer aground. All guests of the wedding are
accounted for, bride included. Confetti in the fairway is not a hazard.

saltpan-echo | Dancing on deck
They are dancing on the ferry that was aground this morning. The bride's shoes remain on the
sandbank, as a deposit. The wedding band played the whole time and asks for overtime.
""",
    ),
    script(
        "Ammonia alarm at the ice factory",
        "operations",
        "ammonia, evacuated, muster, downwind, plume",
        1.0,
        """
watch-log | Ammonia alarm at the ice factory
Ammonia alarm from the ice factory at the Fish Dock. Fire brigade called. Quay to be evacuated as
far as the auction hall; everyone downwind told to shut doors and windows.

status-notes | Fish Dock evacuated
The Fish Dock is being evacuated because of ammonia. Muster point is the Timber Gate, upwind. A
white plume is visible over the roof and drifts to the north east.

tickets | Ice factory: ammonia detector 4 in alarm
Ammonia detector 4 reads above scale, detectors 3 and 5 follow. Plant stopped by the emergency
button. Staff evacuated. Nobody goes in without breathing apparatus, not even for a jacket.

watch-log | Plume over the channel, traffic stopped
Plume crosses the channel at low height. Traffic stopped downwind between the Ferry Stage and the
Spit. Ammonia smell confirmed by a tug, whose crew has gone below.

status-notes | Muster complete but for two
Muster at the Timber Gate counts eighty six of eighty eight evacuated. Two fish buyers missing; last
seen arguing over turbot. Brigade informed. Ammonia reading at the gate is nil.

tickets | Ammonia: relief valve stuck open
Brigade found the relief valve of the ammonia receiver stuck open and shut the stop valve by hand.
Plume is thinning. Water curtain stays up downwind. Fitter on standby at the muster point.

watch-log | Muster complete
Both buyers turned up at the muster, having evacuated themselves to the public house. Count is
eighty eight. Downwind readings falling, no plume to be seen from the tower.

status-notes | Ammonia below the limit
Ammonia below the limit at all measuring points downwind. Those evacuated may go back on the word of
the brigade only. The ice has been written off; the turbot is under discussion.
""",
    ),
)
