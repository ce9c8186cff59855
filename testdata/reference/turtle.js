// Reads a Turtle text and writes its triples as JSON, [[s, p, o, literal], ...], with
// blank nodes as "_:".
'use strict'
const { Parser } = require('n3')
const name = t => t.termType === 'BlankNode' ? '_:' : t.value
const quads = new Parser().parse(require('fs').readFileSync(0, 'utf8'))
process.stdout.write(JSON.stringify(quads.map(q => [name(q.subject), name(q.predicate), name(q.object), q.object.termType === 'Literal'])))
