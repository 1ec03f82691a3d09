/**
 * Common passwords of 12 characters and more, from memory and, last, those of the 30,000 most frequent that the package
 * zxcvbn 4.4.2 (MIT) lists; its first 3,000 hold 12. Shorter ones are refused for their length already, and
 * repeated pieces, walks over the keyboard and the product's name by rules of their own (password-rules.server.ts).
 */
export const COMMON_PASSWORDS: ReadonlySet<string> = new Set(
  `
1234567890ab 123456789abc 1234567890qw 123456789qwe 1234567890abc 123qweasdzxc 1q2w3e4r5t6y 1q2w3e4r5t6y7u 1q2w3e4r5t6y7u8i
1qaz2wsx3edc 1qaz2wsx3edc4rfv 1qazxsw23edc zaq12wsxcde3 zaq1xsw2cde3 q1w2e3r4t5y6 q1w2e3r4t5y6u7i8 qwerty123456 qwerty1234567
qwerty12345678 qwerty123456789 qwerty1234567890 qwertyuiop12 qwertyuiop123 qwertyuiop1234 qwerty654321 qwertyqwerty1 asdfghjkl123
asdfghjkl1234 asdf1234asdf zxcvbnm12345 zxcvbnm123456 abc123456789 abcd12345678 abcdef123456 abcdefg12345 abcdefgh1234 a1b2c3d4e5f6
aa1234567890 aa123456789 a123456789012 azerty123456 azertyuiop12 azertyuiop123 112233445566 121212121212 123123123123 123321123321
123456123456 123456654321 111222333444 147258369147 147258369000 159753159753 159357159357 789456123789 789456123000 987654321000
987654321012 000000000001 111111111112 102030405060 100200300400 135792468000 246813579000 314159265358 3141592653589 271828182845
password1234 password12345 password123456 password1234567 password12345678 password123456789 password2020 password2021 password2022
password2023 password2024 password2025 password2026 passwordpass password0000 password1111 password9999 passw0rd1234 passw0rd12345
p@ssw0rd1234 p@ssw0rd12345 p@ssword1234 p@ssw0rd2024 p@ssw0rd2025 p@ssw0rd2026 pa55word1234 pa$$word1234 pa$$w0rd1234 mypassword12
mypassword123 mypassword1234 newpassword1 newpassword12 newpassword123 oldpassword1 thepassword1 yourpassword yourpassword1 defaultpassword
changepassword passwordchange temppassword temppassword1 temporarypassword secretpassword strongpassword testpassword testpassword1
testpassword123 userpassword adminpassword adminpassword1 rootpassword1 guestpassword masterpassword correctpassword wrongpassword
nopassword123 nopasswordhere password.123 password!234 password@123 password#123 password_123 password-123 passwordword password4you
letmein12345 letmein123456 letmeinplease letmeinletmein letmein2024 letmein2025 welcome12345 welcome123456 welcome1234567 welcome2024
welcome2025 welcome2026! welcomehome1 welcometo123 welcomeback1 changeme1234 changeme12345 changeme123456 changemenow1 changemeplease
changeitnow1 pleasechange pleasechangeme administrator administrator1 administrator123 admin1234567 admin12345678 admin123456789
adminadmin12 adminadmin123 admin123admin admin@123456 admin2024admin superadmin12 superadmin123 superuser123 root12345678 rootroot1234
toor12345678 guest1234567 guestguest12 test12345678 test123456789 testtest1234 testing12345 testing123456 testaccount1 demo12345678
demodemo1234 demopassword demoaccount1 user12345678 username1234 usernameuser default12345 default123456 master123456 monkey123456
dragon123456 shadow123456 sunshine1234 sunshine12345 princess1234 princess12345 football1234 football12345 baseball1234 baseball12345
basketball12 superman1234 superman12345 batman123456 starwars1234 starwars12345 pokemon12345 pokemon123456 minecraft123 minecraft1234
iloveyou1234 iloveyou12345 iloveyou123456 iloveyouforever iloveyousomuch iloveyoubaby iloveyoumom1 iloveyou2much iloveyou!234
michael12345 jennifer1234 jessica12345 charlie12345 jordan123456 ashley123456 thomas123456 computer1234 computer12345 internet1234
internet12345 whatever1234 whateveryouwant trustno11234 trustnobody1 trustnooneelse opensesame12 opensesame123 opensesameplease
abracadabra1 abracadabra12 abracadabra123 blink182blink liverpoolfc1 liverpool123 manchester12 manchester123 manchesterunited chelsea12345
arsenal12345 barcelona123 barcelona1234 realmadrid12 realmadrid123 juventus1234 november2024 december2024 september2024 september2025
september2026 summer202412 spring202412 winter202412 autumn202412 january12345 february1234 thisismypassword thisisapassword
thisisasecret itsasecret12 noneofyourbusiness idontknow123 idontremember iforgotmypassword forgotpassword rememberme12 rememberthis
correcthorse correcthorsebattery correcthorsebatterystaple correct horse battery staple correctbatteryhorsestaple troub4dor&3tr0ub
thequickbrownfox thequickbrown quickbrownfox lorem ipsum dolor loremipsumdolor loremipsum12 helloworld12 helloworld123 helloworld1234
hello1234567 hello12345678 hellohello12 goodmorning1 goodmorning123 happybirthday happynewyear merrychristmas qwert12345qwert
chemistry123 chemistry1234 chemistry12345 laboratory12 laboratory123 laboratory1234 molecule1234 molecules123 conformer123 conformer1234
conformation conformation1 conformations conformational ensemble1234 ensembles123 boltzmann123 boltzmann1234 periodictable
mailcreated5240 123456qwerty polniypizdec0211 sojdlg123aljg leavemealone qazwsxedc123 ghjcnjgfhjkm sonyericsson zxcasdqwe123
ghhh47hj7649 masterbating qwerasdfzxcv qweasdzxc123 flvbybcnhfnjh 123456789987654321 finalfantasy ghbdtnrfrltkf websolutions
chickenwing101 justinbieber contortionist masturbation pornographic newproject2004 needforspeed businessbabe 123456789123
masterbaiting maurolarastefy domainlock2005 momsanaladventure dkflbvbhjdbx hd764nw5d7e1vb1 dkflbvbhjdyf counterstrike
vfvfvskfhfve fkmnthyfnbdf admin18533362 23176djivanfros 123456789qwerty qazxswedcvfr qwertyasdfgh 1111111111zz whosyourdaddy
fktrcfylhjdyf fktrcfylhjdbx 123456789qaz 541233432442 12345678900987654321 010203040506 lost4815162342 vanyarespekt
combat123654 devilmaycry4 iseedeadpeople 89231243658s 123456789qqq jamesbond007 4815162342lost 123123qweqwe qwertyytrewq
1234qwerasdf 123qwe456rty ghjcnjrdfibyj saun24865709 q1w2e3r4t5y6u7 1qa2ws3ed4rf 123456789zxc polniypizdec110211 ptybnxtvgbjy
fucktheworld 12345678987654321 mevefalkcakk playstation3 31217221027711 zqjphsyf6ctifgu 1234567890qwe hedimaptfcor
lhbjkjubz2957704 andrewjackie networkingpe 12qw34er56ty 1qazxsw23edcvfr4 159753456852 123456782000 christopher1 ingodwetrust
installdevic digitalprodu boy4u2ownnyc peanutbutter an83546921an13 1234567890zzz olcrackmaster auckland2010 residentevil
qawsedrftgyh 123321qweewq 32615948worms 742617000027 nemvxyheqdd5oqxyxyzi avrillavigne fuckyoubitch massimiliano 012345678910
41d8cd98f00b nhfdvfnjkju123 gjkysqgbpltw ticketmaster 01telemike01 p030710p$e4o stratocaster punksnotdead playstation2
fynfyfyfhbde ghjcnjqgfhjkm nightcrawler installsqlst 123456789101 frederiksberg 1234567890qaz 1a2s3d4f5g6h sanfrancisco
89876065093rax ghjcnjgbpltw 1234567qwertyu 1234qwerasdfzxcv lytghjgtnhjdcr schoolgirlie 111222333000 zaqwsxcderfv
iloveboobies seemnemaailm nhecsyfujkjdt qwaszxerdfcv antananarivu greenlantern q1w2e3r4t5y6u7i8o9p0 passwordstandard
corperfmonsy maprchem56458 warhammer40k 1234567890qwerty morganstanley 1234567890987654321 cjdthitycndj bltynbabrfwbz
stinkyfinger qwertyuiop10 qazxswedc123 iampurehaha2 zxcvbn123456 gtnhjpfdjlcr 123321456654 59382113kevinp bpgjldsgjldthnf
rfnthbyf1988 1qa2ws3ed4rf5tg qwertyuiop12345 nhfycajhvths msorcloledbr stickdaddy77 asdfgh123456 123456789asd specialinsta
michaeljackson webuivalidat 1234567887654321 1234567892000 ilovemyfamily weihnachtsbau 014702580369 qaz123wsx456
123456789qwer 111222333444555 123456789000 systemofadown vladimirovna 122333444455555 amadeusptfcor zxcvbnm123456789
websolutionssu mortalkombat paraklast1974 minnesota_hp nondriversig 123qwerty123 a1s2d3f4g5h6 z1x2c3v4b5n6m7 ghjnbdjcnjzybt
thecakeisalie fktrcfylhjdf ontheoutside zcfvfzkexifz sonnenschein wazzkaprivet xxxp455w0rd5 qwertasdfgzxcvb weihnachtsbaum
`
    .trim()
    // Entries are one to a blank; the few with blanks inside are compared without them as well.
    .split(/\s+/)
    .concat([
      "correct horse battery staple",
      "correcthorsebatterystaple",
      "the quick brown fox",
      "lorem ipsum dolor",
      "this is my password",
      "let me in please",
    ])
    .filter((entry) => entry.length >= 12),
);
