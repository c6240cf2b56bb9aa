"""The stories planted in the newsroom's archive, as written."""

from __future__ import annotations

from vanner.sources.demo.script import StoryScript, script

NEWSROOM_STORIES: tuple[StoryScript, ...] = (
    script(
        "The mine in the roads",
        "newsroom",
        "mine, detonation, ordnance, divers, cordon",
        6.0,
        """
harbour-press | Navigation warning: suspected mine in Ossenhithe Roads
A rusted object, believed to be a contact mine, was caught in a trawl this morning. Ordnance
divers have been called. A cordon of one mile is in force until further notice; masters are asked
to keep clear and to stay calm, in that order.

ebbing-wire | Trawler hauls up old mine off Ossenhithe
The crew of a trawler found a horned mine among the plaice off Ossenhithe today and lowered it
again with great politeness. Ordnance specialists and divers are on their way; police drew a
cordon around the Roads.

courier | Mine in the Roads: the outer moorings are emptied
Anchored coasters left the Roads within the hour after a mine, thought to be some eighty years
old, came up in the nets. The cordon also shuts the bathing steps. A controlled detonation is
likely once divers have looked at the horns.

saltpan-echo | No swimming, says constable, because of mine
Saltpan's sea bathers were turned back at the cordon before breakfast. "It is only a mine," one of
them protested, towel in hand. Ordnance divers went down at noon, and the tea hut is doing its
best business in years.

ebbing-wire | Divers confirm mine is live, detonation planned
Divers say the mine off Ossenhithe still holds its full charge. A naval ordnance team prepares a
detonation under water at low tide. The cordon has been widened to two miles and takes in the
pilot boarding ground.

courier | Windows open, please: detonation at low water
Householders along the front are asked to open windows before the detonation, to save the glass.
The ordnance team hung a ring of charges around the mine; its divers were back on deck with soup
by early afternoon.

harbour-press | Mine destroyed, cordon lifted
The detonation took place as planned and raised a column of water as high as the lighthouse. The
ordnance team found no part of the mine larger than a bread tin. Divers will look over the seabed;
the cordon is lifted and anchorage is free again.

saltpan-echo | A bang, and a free lunch for the gulls
The mine went off with a thump that was felt in the chapel. The detonation stunned several boxes
of whiting, which the gulls treated as a civic reception. Behind the cordon the crowd clapped; the
divers bowed.
""",
    ),
    script(
        "Violet foam in the dock",
        "newsroom",
        "foam, violet, lather, detergent, skimmers",
        7.0,
        """
saltpan-echo | Violet foam fills the Coaster Basin
Early dog walkers met a wall of violet foam at the Coaster Basin this morning, waist high and
smelling faintly of lavender. By breakfast the lather had reached the second bollard and was still
making progress.

harbour-press | Foam in Coaster Basin under investigation
The harbour authority is aware of violet foam in the Coaster Basin. Samples have been taken and
two skimmers are at work. The public is asked not to collect the lather in buckets, for whatever
purpose.

courier | Where does the foam come from?
Nobody in the harbour would own up to the violet foam that covered the Coaster Basin today. A
chemist at the college took one sniff and guessed at detergent, and a good one. Skimmers could not
keep pace with the lather.

ebbing-wire | Strange violet foam closes harbour basin
Violet foam up to a metre deep closed a basin at Ossenhithe to small craft. The authorities suspect
detergent from a leaking drum. Skimmers removed forty tonnes of lather by noon, and by one o'clock
it was all back.

town-council | Violet foam: advice to households
The foam is not thought to be harmful, but it stains. Laundry should be kept indoors. Anyone who
has poured away detergent, in particular a great deal of detergent, is invited to telephone the
environment office in confidence.

courier | Laundry drain blamed as foam reaches the street
A cracked drain behind a steam laundry is the likely source of the violet foam, inspectors said.
The detergent is sold as a trial colour. Children have named the largest drift of lather; the
skimmers are going round it.

saltpan-echo | Ducks come out of it whiter than before
The ducks of the Coaster Basin left the violet foam a shade cleaner, to nobody's surprise. The
laundry has stopped its detergent line, the skimmers have the upper hand and the last of the lather
is drifting seaward.
""",
    ),
    script(
        "The mayor resigns",
        "newsroom",
        "resignation, resigns, mayoralty, beehives, honey",
        5.0,
        """
town-council | Statement on the mayoralty
Mayor Perpetua Quellander has handed in her resignation with effect from midnight. The duties of
the mayoralty pass to the deputy. The council thanks her for eleven years and for the honey at
Christmas.

courier | Mayor Quellander resigns without warning
Perpetua Quellander resigns as mayor of Ossenhithe, the town hall confirmed today in four lines.
She gave no reason beyond a wish to see more of her beehives. Colleagues learned of the resignation
from the porter.

ebbing-wire | Ossenhithe mayor resigns, cites beehives
The mayor of Ossenhithe resigns after eleven years. In her letter of resignation she wrote that
twelve beehives needed her more than twelve committees did. The mayoralty had been thought safe
until the next poll.

saltpan-echo | "The bees never adjourn": mayor explains herself
Over the garden fence the mayor said that her resignation had been written since spring. Beehives,
she explained, reach decisions. Whoever wants the mayoralty may have the chain; she keeps the honey.

courier | Who wants the mayoralty?
Three councillors were seen measuring the mayor's parlour within hours of the resignation. Under
the charter a poll follows within sixty days when a mayor resigns. A bookmaker takes bets on the
mayoralty, payable in honey.

ebbing-wire | Opposition asks what lies behind mayor's resignation
Opposition members doubt that beehives alone explain why the mayor resigns in the middle of the
budget. The outgoing mayor replied that anybody was free to inspect the honey. Papers on the
mayoralty's expenses are to be published.

town-council | Timetable after the resignation of the mayor
Nominations for the mayoralty open next week. The resignation has been entered in the minutes. The
beehives on the town hall roof are private property and will be moved at dusk, with the windows
shut.
""",
    ),
    script(
        "A whale in the estuary",
        "newsroom",
        "whale, beaked, flukes, blowhole, refloat",
        8.0,
        """
saltpan-echo | Whale seen off Saltpan steps
Something large sighed beside the Saltpan steps at first light. Bathers saw a blowhole, then
flukes, and finally the whole of a whale, some six metres of it, going up the Quarle as if it had
an appointment.

ebbing-wire | Rare whale swims into Quarle estuary
A beaked whale, a kind that keeps to deep ocean and is hardly ever seen alive, has swum into the
Quarle estuary. Biologists asked boats to stay away from its flukes and keep their engines off.

harbour-press | Speed limit because of whale
Because of a whale in the fairway all vessels proceed at four knots above the Spit. Whoever sees
flukes or a blowhole is asked to report the position and to resist the temptation to follow.

courier | The beaked guest: crowds line the mole for the whale
By noon several hundred people stood along the mole, applauding every breath from the blowhole. The
beaked whale, a young female according to the museum, lifted her flukes twice and took no further
notice of the town.

ebbing-wire | Whale stuck on mud bank as tide falls
The beaked whale in the Quarle ran onto a mud bank at half ebb. Volunteers keep her back wet with
blankets and pour with care around the blowhole. Rescuers hope to refloat her at high water tonight.

courier | Buckets, blankets and a choir
A human chain passed buckets to the whale all afternoon, and the chapel choir sang, softly, on
expert advice. A rubber pontoon to refloat her has arrived by lorry. Her flukes move; the vet is
content.

harbour-press | Attempt to refloat the whale at high water
The attempt to refloat the beaked whale begins at the top of the tide. Two tugs make a calm lane
towards the bar. Spectators are asked to stand back from the flukes, which weigh more than they do.

saltpan-echo | She is off! Whale makes for the open sea
They managed to refloat her in eleven minutes. The whale blew once, a blowhole salute as some would
have it, showed her flukes to the mole and went. The beaked head was last seen pointing firmly west.
""",
    ),
    script(
        "Lemons on the beach",
        "newsroom",
        "lemons, citrus, marmalade, beachcombers, rind",
        7.0,
        """
saltpan-echo | Beach turns yellow: thousands of lemons
Wexby Sands woke up yellow. From the groyne to the bathing huts the tide line consists of lemons,
thousands upon thousands, slightly salted. The first beachcombers came with prams.

courier | Lemons by the tonne washed up at Wexby Sands
A cargo of lemons is coming ashore between Wexby and the river. Where the citrus fell into the sea
is not known. Beachcombers were filling pillowcases by eight, and one gentleman his hat.

harbour-press | Drifting citrus: containers lost in heavy swell
A coaster has reported the loss of three containers of lemons on deck passage. Small craft should
look out for floating boxes. The citrus itself is no danger to shipping, though the rind is slippery
on slipways.

ebbing-wire | Coast town buried in lemons
Some two hundred thousand lemons were washed ashore near Ossenhithe after containers went
overboard. The customs office says that beachcombers must declare citrus above a household amount,
and left that amount open.

courier | Whose lemons are they? The law of the tide line
The receiver of wreck holds that the lemons belong to the shipper. The beachcombers hold that they
are already marmalade. The insurer was shown a piece of salted rind and asked for a glass of water.

town-council | Collection of lemons at the bathing huts
The works department collects citrus at the bathing huts until dusk. Rind must not go down the
drains. Recipes for marmalade are laid out at the library; please bring your own jars.

saltpan-echo | Saltpan smells of marmalade
Every stove in Saltpan is boiling lemons tonight. Sugar is sold out as far as Marshgate and the
chapel has lent its urns. Beachcombers report that sea water improves the rind; experts of the
citrus trade disagree.
""",
    ),
    script(
        "The burst lock gate",
        "newsroom",
        "lock, burst, lockkeeper, torrent, sandbags",
        5.0,
        """
ebbing-wire | Lock gate gives way at Eelbridge
The upper lock gate at Eelbridge broke this morning and sent a torrent down the Quarle canal. The
lockkeeper sounded the horn in time; nobody was hurt. Fire crews are laying sandbags along the
towpath.

courier | Eelbridge: "The lock simply burst"
"It groaned, and then it burst," said the lockkeeper, who watched the oak gate fold from her kitchen
window. The torrent took two rowing boats, a bench and her washing. The lock is a hundred and forty
years old.

town-council | Burst lock at Eelbridge: advice
Please avoid the towpath below the burst lock. Sandbags are given out at the fire station, four to a
household. Cellars in Eelbridge and lower Tanfield should be cleared before the torrent reaches
them.

saltpan-echo | Sandbags and soup in Eelbridge
Half of Eelbridge stood in line passing sandbags this morning while the other half made soup. The
lockkeeper was given dry stockings by three separate households. The burst gate went by in pieces.

harbour-press | Effects of the burst lock on the port
The torrent from the burst lock brings driftwood and one garden shed into the upper harbour. Small
craft above the bridge should double their lines. Spare stop logs for the lock leave on a barge at
noon.

courier | Canal drained, bicycles found
Above the burst lock the canal is empty for two miles, and its bed holds ninety bicycles. Engineers
set stop logs to close the gap; the torrent has fallen to a trickle. Sandbags stay until tomorrow.

ebbing-wire | Engineers close burst lock with stop logs
Stop logs have sealed the burst lock at Eelbridge. The lockkeeper said that rot under the paint had
been reported in two letters. A new gate will take ten months; four hundred sandbags are to be
returned, dry if possible.
""",
    ),
)
