"""Routine topics of the newsroom: sport, culture, people, notices and the police round."""

from __future__ import annotations

from vanner.sources.demo.topic import Topic, topic

LIFE: dict[str, Topic] = {
    "football": topic(
        """
{club} and {club2}: [report|what we saw] ::
 {club} [beat|drew with|lost to] {club2} in [the coastal league|a cup replay|a friendly] on
 {weekday} before {num 90 1900} spectators and a brass band.
{person.last} [on target|scores] for {club} ::
 {person} scored [twice|late|from the spot|with his knee] as {club} [saw off|held|came back
 against] {club2} in {district}.
{club} sign {person.last} from {club2} ::
 {club} have signed {person}, {num 17 34}, a [winger|goalkeeper|full back] and {trade}, from
 {club2}.
        """,
        """
12> Manager {person2} was [pleased|not displeased|lost for words] with the second half.
{club} stay [third|fourth|seventh|ninth|second from bottom] with {num 8 60} points.
12> The equaliser came from a corner that nobody remembers awarding.
12> According to {fan}, the referee [saw well|needs a holiday|was fair to both].
Next week {club} travel to {club3}.
12> {person3} limped off with a bruised [shin|ankle|dignity] before the interval.
12> The pitch was [heavy|firm|sandy at the sea end] and the pies sold out.
12> Goalkeeper {person4} kept out [two headers|a penalty|a free kick from the halfway line].
        """,
    ),
    "other_sport": topic(
        """
{village} crew at {town} regatta ::
 The {village} [coxed four|gig crew|veterans] finished [first|second|third] at {town} on {weekday},
 {num 1 9} seconds [ahead of|behind] {town2}.
{district} and {village} meet again ::
 In the [darts|bowls|table tennis|chess] league {district} [beat|drew with] {village} by {num 3 9}
 games to {num 0 4} on {weekday}.
{person.last} [first|fastest] from {village} ::
 {person} won the [ten mile run|harbour swim|hill climb|time trial] from {village} in {num 22 58}
 minutes and {num 2 58} seconds.
        """,
        """
Steward {person2} had never seen a closer [finish|measure|final end].
123> The trophy, a silver [oar|pigeon|teaspoon], stays in {district2} for another year.
Entries for the spring meeting close on {weekday2}.
{person3}, {num 61 88}, completed the course in [tweed|clogs|good humour].
12> Training moves indoors to {venue}.
A protest over [a late start|a missing buoy|chalk] was heard and dismissed.
Juniors of {school} took part for the first time.
        """,
    ),
    "culture": topic(
        """
Stage: {play} at {venue} ::
 The [players|amateurs|Tanfield company] open with {play} at {venue} on {weekday}, with {person} in
 the part of the [aunt|notary|lodger|ghost].
[Concert|Recital] with {instrument} at {venue} ::
 {person} plays the {instrument} and {person2} the {instrument2} at {venue} on {weekday}; admission
 is {num 3 15} crowns.
Exhibition at {venue} ::
 An exhibition of [ship portraits|lace|old maps|harbour photographs|teapots] by {person} runs at
 {venue} until {weekday} week.
        """,
        """
1> Our critic found the second act [long|tender|louder than the first].
2> The {instrument3} section was applauded separately.
Tickets at the door or from {firm}.
12> The interval is long enough for soup.
1> {person3} painted the scenery on sailcloth given by {firm2}.
An evening on {hobby} follows on {weekday2}.
12> The programme also has songs from {village} and a march.
Ushers ask that umbrellas be left with the attendant.
3> The curator calls it the fullest collection between here and {town}.
        """,
    ),
    "notices": topic(
        """
Lost: one {object} ::
 Lost between {street} and {street2} on {weekday}: a {object}, of sentimental value to {person}.
Lost property: {object}, {object2} ::
 Found on the number {num 1 14} bus and waiting at the lost property office: a {object}, a
 {object2} and a {object3}.
{hobby} at {venue} ::
 The {hobby} circle meets at {venue} on {weekday}; bring [a chair|your own needle|a friend|cake].
What is on at {venue} ::
 A [jumble sale|coffee morning|plant swap|quiz] for the [lifeboat box|chapel roof|scouts|band] is
 held at {venue} on {weekday}.
        """,
        """
34> The stall of {person2} had a {object4} that went to a {trade} from {village}.
12> A reward of {num 5 40} crowns or a pot of {vegetable} chutney is offered.
12> Enquiries to {person3}, {num 1 120} {street3}, after [supper|six|the news].
34> Refreshments by the ladies and gentlemen of {village}.
The {vegetable} class at the allotment show was won by {person3}.
34> Children under {num 5 12} come in free and leave with a balloon.
4> The organisers thank {firm} for the loan of trestles.
3> Spare places remain for beginners in {hobby2}.
12> A {object5} was also handed in and is thought to be a joke.
        """,
    ),
    "police": topic(
        """
Police notes: {object} missing ::
 Police are looking for whoever took a {object} and {num 20 400} crowns from a [kiosk|van|workshop|
 pavilion] in {street} overnight.
Fire brigade in {street} ::
 The fire brigade put out a [chip pan|shed|dustbin|hedge] fire in {street}, {district}, on
 {weekday}; nobody was hurt.
{object} back with its owner ::
 Constable {person} returned a {object} to its owner in {street} after {num 2 9} days of enquiries.
        """,
        """
Sergeant {person2} asked residents to [bolt sheds|note numbers|leave a light on].
12> Damage is put at {num 50 2500} crowns.
2> The brigade also freed [a cat|a pigeon|a boy of {num 4 9}] from [a drainpipe|a railing|a
 chimney].
1> A suspect in a [green|tan|striped] jumper was seen running towards {street2}.
Neighbours had raised the alarm with a saucepan.
Witnesses may call the station in {street3} at any hour.
13> A {object2}, thought to be from the same haul, lay in a hedge near {village}.
13> The owner, a {trade}, described himself as [relieved|insured|puzzled].
        """,
    ),
    "people": topic(
        """
{person}, {trade}, retires ::
 {person} of {street} has [retired|stepped back] after {num 21 52} years as a {trade}, and says
 that [the knees|the early hours|the paperwork] decided it.
{person.last} anniversary in {district} ::
 {person} and {person2} of {district} celebrated {num 50 65} years of marriage with [{fish} pie|a
 dance|a bus trip to {village}].
Honour for {trade} {person} ::
 The {trade} {person}, known to all of {district}, received the [civic spoon|lifeboat medal|freedom
 of the allotments] on {weekday}.
        """,
        """
13> Born in {village}, {person.last} came to Ossenhithe as [a child|an apprentice|a stowaway, or so
 the family says].
1> Colleagues at {firm} gave a {object} and a speech.
In spare hours there is {hobby}, and a {instrument} that the neighbours know well.
2> The secret, both agree, is [separate sheds|weak tea|not minding].
There are {num 2 9} grandchildren and {num 1 4} tortoises.
The mayor's office sent a card.
"I should do it all again, but in better boots," was the only comment.
1> A successor has not been [found|sought|announced].
        """,
    ),
}
