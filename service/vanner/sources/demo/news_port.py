"""Routine topics of the newsroom: the port, the fish market, the ferries, trade and weather."""

from __future__ import annotations

from vanner.sources.demo.topic import Topic, topic

PORT: dict[str, Topic] = {
    "shipping": topic(
        """
[Arrivals|Shipping list]: {ship}, {ship2} ::
 [Arrived|Berthed] at {wharf}: {ship} from {town} with {cargo}, and {ship2} in ballast from
 {town2}.
{ship} at {wharf} for {cargo} ::
 {ship} [is loading|is discharging|will load] {num 400 4800} tonnes of {cargo} at {wharf} for
 [{firm}|account of {firm}].
Expected on {weekday}: {ship}, {ship2} ::
 Expected on {weekday}: {ship} with {cargo} from {town}, {ship2} with {cargo2} from {town2}.
{ship} leaves for {town} ::
 The coaster {ship} left {wharf} for {town} with {cargo} on the [morning|evening|night] tide.
        """,
        """
At anchor and waiting for orders lies {ship4}.
Agents are {firm2}, who ask lorries to report at {gate}.
12> Stevedores worked [one gang|two gangs|overtime] until the [rain|whistle|last sling] stopped
 them.
{ship3} sailed in ballast for {town3}.
124> Master {person} reported [an easy|a tedious|a wet] passage and a good cook.
Port dues are unchanged on the quarter.
{cargo3} continues to arrive in [smaller|larger|regular] parcels, traders say.
123> {ship2} is to shift to {wharf2} when the berth is free.
        """,
    ),
    "fish_market": topic(
        """
Fish prices: {fish}, {fish2} ::
 At {weekday}'s auction {fish} made {num 2 19} crowns a kilo and {fish2} {num 2 19}, with
 [brisk|sleepy|fair] bidding on the Fish Dock.
[Landings|Boxes] at the Fish Dock: mostly {fish} ::
 {num 8 60} boats landed {num 200 2400} boxes, mostly {fish} and {fish2}, the auction hall reported
 on {weekday}.
{fish} [talked about|missed|in demand] at auction ::
 {fish} was [short|plentiful] after [a windy night|two calm days|the holiday] and {fish2} held its
 price, buyers said.
        """,
        """
Auctioneer {person} sold the last box of {fish3} to {firm}.
The cooperative advises smaller meshes for {fish3} from next season.
Restaurants in {town} took most of the {fish3}.
Ice was [ample|rationed|late] and the gulls attentive.
Skipper {person2} put his catch down to [patience|new nets|his mother's advice].
Quota for {fish3} stands at {num 30 90} per cent used.
The market cat is reported to be in excellent health.
Crates must be rinsed before return, the hall master repeats.
        """,
    ),
    "ferry": topic(
        """
Ferry timetable for {weekday} ::
 The ferry company will run {num 1 4} [extra|fewer] crossings to {village} on {weekday}, with
 {ferry} on the [first|second] roster.
{ferry} [is back|returns] in service ::
 {ferry} returns to the {village} service on {weekday} after [its annual survey|a coat of paint|new
 seats] at {firm}.
Season tickets to {village} ::
 Season tickets between Ossenhithe and {village} will [cost {num 1 6} crowns more|stay at the same
 price|be sold on board] from next month.
        """,
        """
The last boat leaves the Ferry Stage at a quarter past [nine|ten|eleven].
Bicycles travel free outside the [rush|market] hours.
Passengers said the tea on board had [improved|not improved].
Mate {person} asks that dogs be kept off the [seats|bridge|lifejackets].
Connections with the bus to {village2} are kept, the company says.
The slipway at {village2} is being scraped of weed.
Timetable leaflets are free at the [kiosk|town library|ticket hatch].
        """,
    ),
    "weather": topic(
        """
{weekday}: {sky}, then {sky2} ::
 {weekday} will be {sky} at first and {sky2} later, with {wind} winds and {num 4 19} degrees in the
 town.
Coastal forecast: {sky}, {wind} ::
 The weather office at Harrowness expects a {sky} night, {wind} winds and a {seastate} sea between
 {village} and the bar.
Tides and winds for the Quarle estuary ::
 High water at the Ferry Stage is given as {num 2 5} metres; winds {wind}, visibility [good|
 moderate|fair with patches of mist].
        """,
        """
Gardeners may expect [a touch of frost|enough rain to put away the can|a drying breeze].
Inland, towards {village2}, it stays [brighter|cooler|damp].
The pressure is [rising slowly|falling slowly|steady].
Observer {person} recorded {num 1 18} millimetres of rain at the [allotments|chapel|lighthouse].
Small craft should [note the ebb|keep an eye on the sky|have an easy day].
The outlook beyond {weekday2} remains [uncertain|unsettled|promising].
Sunset viewers are directed to {street}.
        """,
    ),
    "business": topic(
        """
{firm} [presents|explains] its figures ::
 {firm} said on {weekday} that sales had [risen|fallen] by {num 1 14} per cent on [strong|weak]
 demand for {cargo}.
{firm} [looks for|makes room for] people in {district} ::
 {firm} will [take on|retrain] {num 3 60} people at its [works|yard|office] in {district}, managing
 director {person} announced.
[Order|Contract] from {town} for {firm} ::
 A customer in {town} has ordered [two launches|a year's supply of {cargo}|{num 200 900} crates]
 from {firm}.
Shop news from {street} ::
 A new [hat shop|bakery|bicycle repairer|tea room] has opened at {num 1 90} {street} in premises
 that once belonged to {firm}.
        """,
        """
1> The chamber of commerce called the figures [encouraging|respectable|a start].
12> Shop steward {person2} asked for a share of the [profit|credit|canteen refurbishment].
1> Energy and [freight|packaging|flour] remain the largest costs.
The company was founded by a {trade} with {num 2 9} employees and a mule.
1> A dividend of {num 1 9} crowns is proposed.
2> Apprenticeships are open to school leavers; forms at the labour office.
Competitors in {town2} declined to comment, at some length.
Deliveries to {village} now leave on {weekday2}.
        """,
    ),
    "nature": topic(
        """
Bird notes: {bird} and {bird2} at {village} ::
 Wardens counted {num 20 900} {bird} and {num 3 90} {bird2} on the saltings below {village}, the
 naturalists' society noted on {weekday}.
First {bird} at {village} ::
 The first {bird} of the season was seen at {village} by {person}, a {trade} with a new telescope.
[Spades|Gloves] out for the {bird} ::
 Volunteers [cleared|fenced|planted] {num 40 600} metres of [dune|bank|hedge] near {village} to the
 benefit of {bird} and {bird2}.
        """,
        """
Walkers should keep to the boardwalk and dogs to their leads.
The reed beds are [drier|wetter|greener] than last year.
A pair of {bird3} is thought to be nesting, exactly where is nobody's business.
The society meets at {venue} on {weekday2}; beginners may borrow binoculars.
Samphire is [early|late] on the outer flats.
{person2} gave a talk with slides, some of them the right way up.
Water quality off {village2} was rated [good|sufficient|excellent].
        """,
    ),
}
