"""Routine topics of the newsroom: the town hall, the court, the roads and the schools."""

from __future__ import annotations

from vanner.sources.demo.topic import Topic, topic

TOWN: dict[str, Topic] = {
    "council": topic(
        """
[Council|Committee] [talks|argues|thinks aloud] over {street} for hours ::
 The town council [spent|gave] [two hours|most of the evening|a full agenda item] on {weekday} to
 the question whether {street} needs [new paving|more benches|a weight limit|another lamp post].
{councillor.last} asks for [patience|new figures|a second opinion] on {street} ::
 {councillor} told the [works|finance|parks] committee that the [estimate|tender|report] for
 {street} was [late|thin|sound] and should [come back in the spring|go to a vote|be read twice].
{councillor.last} and the question of {district} ::
 A motion by {councillor} on [litter bins|hanging baskets|public clocks|bus shelters] in {district}
 was [carried|lost|adjourned] by {num 4 11} votes to {num 1 9} on {weekday}.
Residents of {district} [heard|thanked|kept waiting] at council meeting ::
 Ratepayers from {district} filled the public gallery as the council debated the [library hours|
 parking charges|cemetery wall|allotment rents] once more.
        """,
        """
123> {councillor2} called the proposal [a modest improvement|a sledgehammer for a walnut|overdue].
123> The treasurer put the cost at {num 3 90} thousand crowns, spread over [two|three|four] years.
124> A petition with {num 40 900} signatures had been handed in by {person} of {street2}.
The clerk reminded members that the minutes of the last meeting were still [unsigned|in dispute].
Officers will [report back|measure the site|consult the neighbours] before the next session.
{councillor2} abstained, having [an aunt|a garage|a share in a bakery] in the street concerned.
123> The deputy mayor moved to the next item to audible relief from the gallery.
134> Amendments on [drainage|planting|signage|gritting] were taken together and passed without
 debate.
The chamber's heating was discussed under any other business, as is customary.
{person2}, who has attended every session since the [old pier|tramway|market hall] closed, took
 notes.
        """,
    ),
    "planning": topic(
        """
{firm} plans for {street} go on display ::
 {firm} has applied to [convert|extend|replace] its [store|yard|counting house|loading bay] on
 {street}, according to papers that went on display at the town hall on {weekday}.
Inspectors decide on {street} ::
 Inspectors have [granted|refused|deferred] permission for [a terrace of {num 4 14} houses|a dormer
 window|a bicycle shelter|a bakery with living quarters] at {num 2 140} {street} in {district}.
[Neighbours|Letter writers] have views on {district} plan ::
 An outline plan for [the old net store|the gasworks site|the tannery|the signal box] in {district}
 drew {num 12 160} comments, most of them about [shade|parking|gulls|the view].
        """,
        """
12> The conservation officer asked for [slate|lime mortar|sash windows|a lower ridge] in keeping.
{person} of {street2} fears for the light in her [kitchen|greenhouse|sewing room].
13> Architects say the facade will follow the line of the [former|neighbouring] warehouse.
Comments may be sent to the planning counter until {weekday2} week.
Surveyors found the foundations [dry|better than feared|resting on oyster shells].
23> A condition requires {num 2 9} replacement trees and a place for swifts to nest.
13> {firm} says building could begin once the [drains|boundary|lease] had been settled.
The parish society described the drawings as [handsome|timid|tall].
        """,
    ),
    "court": topic(
        """
{trade} before the magistrate ::
 A {trade} from {district} [admitted|denied] {offence} when {person} appeared before {magistrate}
 on {weekday}.
[Case|Evening|Misunderstanding] in {street} ends in court ::
 {person}, {num 19 78}, of {street}, was [fined {num 40 600} crowns|bound over|given {num 20 120}
 hours of community service|conditionally discharged] for {offence}.
[Petty sessions|Magistrates] work through the list ::
 The petty sessions under {magistrate} dealt with {num 5 19} cases on {weekday}, among them one of
 {offence} in {street}.
        """,
        """
12> The defence said {person.last} had [acted on impulse|mistaken the gate|been up since four].
{magistrate} remarked that the court had [heard the excuse before|every sympathy but no choice].
12> Costs of {num 30 210} crowns were awarded, payable in instalments.
A witness, {person2}, described events outside the [bakery|chapel|bus station] at closing time.
Sentence was put off until a probation report could be [written|found].
12> The prosecution offered no evidence on a second charge of {offence2}.
An usher twice asked the gallery to refrain from [laughing|advice|eating].
12> The licence was endorsed and the [bicycle|barrow|van] returned to its owner.
        """,
    ),
    "roads": topic(
        """
[Roadworks|Patience] in {street} from {weekday} ::
 Drivers should allow {num 5 25} minutes more through {district} from {weekday}, when {roadwork}
 begins in {street}.
[Bump|Collision] at {street} corner ::
 A [car|van|bicycle|milk float] and a [lorry|bus|taxi|handcart] collided at the corner of {street}
 and {street2} on {weekday}; police spoke of [light injuries|damaged paintwork|wounded pride].
{street} closed overnight for {roadwork} ::
 The highways office will close {street} in {district} overnight for {roadwork}.
        """,
        """
13> Buses of line {num 1 14} stop in {street2} for the time being.
13> Temporary lights are set to [favour|confuse|delay] both directions equally, the foreman said.
2> Police ask anyone who was in {street} around [noon|breakfast|closing time] to come forward.
13> Access to the [surgery|coal yard|nursery|post office] remains open on foot.
2> A breakdown lorry from {firm} cleared the carriageway within the hour.
13> The contractor, {firm}, expects to finish [on time|before the market|weather permitting].
13> Cyclists are advised to use {street3} and to ring their bells.
13> {person}, who lives at the corner, offered the crew tea and remarks.
        """,
    ),
    "schools": topic(
        """
{school} shows its work ::
 Pupils at {school} [presented|opened|finished] their [term project|weather diary|school play|
 model of the harbour] on {weekday} before parents and {num 1 4} patient governors.
{school} welcomes {person} ::
 {school} has [appointed|welcomed] {person} as [head of music|deputy head|caretaker|librarian], the
 governors said.
[Contest|Cup|Certificate] for {school} ::
 Year {num 3 11} of {school} [came first|came second|was commended] in the regional [quiz|choir|
 mathematics|swimming] contest at {town}.
        """,
        """
13> Head teacher {person2} praised [careful work|steady nerves|the packed lunches].
3> The prize, a [globe|dictionary|cheque for {num 50 400} crowns], will stand in the entrance hall.
Parents raised {num 90 900} crowns with a [cake|plant|jumble] sale.
The canteen will serve {fish} on {weekday2} by popular request of the staff.
Enrolment for the next year opens at the school office on {weekday2}.
A retired {trade} showed the children how to [splice rope|set type|read a barometer].
The caretaker has found the missing [drum|goalpost|skeleton from biology].
Evening classes in {hobby} begin after the holidays.
        """,
    ),
    "health": topic(
        """
[Infirmary|Matron] invites to {venue} ::
 The infirmary will hold a [blood donor|vaccination|hearing|first aid] session at {venue} on
 {weekday}, the matron said.
[Surgery|Practice] in {street} is [hiring|searching] ::
 The surgery in {street} is [short of|looking for] a [nurse|dentist|receptionist] after {person}
 [retired|moved to {town}|married].
Waiting times [shorter|better] at infirmary ::
 Waiting times for [eye tests|knee operations|physiotherapy] fell by {num 2 9} days last quarter,
 the infirmary reported.
        """,
        """
Doctor {person2} advised [a brisk walk|more sleep|fewer pies|sensible shoes].
Appointments can be made by telephone or at the hatch.
A new [scanner|ward kitchen|lift] was paid for by the League of Friends.
Volunteers drove {num 40 400} patients to their appointments last month.
The dispensary in {street2} keeps shorter hours on {weekday2}.
1> Donors receive a biscuit and, on request, a second biscuit.
Beds in the east wing are closed for painting.
        """,
    ),
}
