module calandria.example/calandria

go 1.26
